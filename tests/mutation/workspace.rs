//! A copy of the workspace with both versions of every chosen place, its tests, and how they run.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use crate::mutate::{self, Chosen};

/// What every file of the copy asks.
const SWITCH: &str = r#"
/// Which of two versions of an expression is computed.
pub mod mutants {
    use std::sync::LazyLock;
    static ACTIVE: LazyLock<Option<usize>> =
        LazyLock::new(|| std::env::var("DRIFTWRIGHT_MUTANT").ok()?.parse().ok());
    /// Whether the wrong version of this place is.
    pub fn is_active(number: usize) -> bool {
        *ACTIVE == Some(number)
    }
}
"#;

/// Some tests of a program.
struct Step {
    program: &'static str,
    /// Parts of the names of the tests to run; none for all.
    tests: &'static [&'static str],
    /// Parts of the names of tests that are left out.
    but: &'static [&'static str],
    /// Processor seconds. Sound ones take a tenth of it; what takes longer has been sent round in
    /// circles.
    seconds: &'static str,
}

/// The table of equations, which catches most of what the quick tests leave.
const EQUATIONS: &str = "tests::equations";

/// Tests of the algebra that take a second and more.
const SLOW: &[&str] = &[
    EQUATIONS,
    "tests::soundness",
    "tests::budgets",
    "tests::properties",
    "long_sum",
    "deep_and_large",
];

/// What may catch a mutant, the quickest first; the first step that fails is the last.
const STEPS: [Step; 5] = [
    Step {
        program: "driftwright",
        tests: &["calculus", "symbolic"],
        but: SLOW,
        seconds: "10",
    },
    Step {
        program: "driftwright",
        tests: &[EQUATIONS],
        but: &[],
        seconds: "40",
    },
    Step {
        program: "calculus",
        tests: &[],
        but: &[],
        seconds: "20",
    },
    Step {
        program: "planner",
        tests: &[],
        but: &[],
        seconds: "60",
    },
    Step {
        program: "driftwright",
        tests: SLOW,
        but: &[EQUATIONS],
        seconds: "60",
    },
];

/// Memory of a test in kB: a mutant that never stops growing must not take the machine with it.
const MEMORY: &str = "6000000";

/// A shell that limits what it then becomes.
const LIMITED: &str = r#"ulimit -v "$0" && ulimit -t "$1" && shift && exec "$@""#;

/// A copy of the repository in which files can be rewritten.
pub(crate) struct Copy {
    original: PathBuf,
    directory: tempfile::TempDir,
}

impl Copy {
    pub(crate) fn of(repository: &Path) -> Self {
        let directory = tempfile::tempdir().expect("room for a copy");
        for part in [
            "Cargo.toml",
            "Cargo.lock",
            "compiler",
            "runtime",
            "macros",
            "tests",
            "models",
        ] {
            copy(&repository.join(part), &directory.path().join(part));
        }
        let library = directory.path().join("compiler/src/lib.rs");
        let text = fs::read_to_string(&library).expect("the library") + SWITCH;
        fs::write(library, text).expect("the copy is writable");
        Self {
            original: repository.to_owned(),
            directory,
        }
    }

    pub(crate) fn write(&self, directories: &[&str], chosen: &Chosen) {
        mutate::write(&self.original, self.directory.path(), directories, chosen);
    }

    /// Builds the tests; if that fails, the mutants that stand in the way.
    pub(crate) fn build(&self) -> Result<Built, BTreeSet<usize>> {
        let target = self.original.join("target/mutation");
        let output = Command::new(env!("CARGO"))
            .args([
                "test",
                "-p",
                "driftwright",
                "--no-run",
                "--lib",
                "--message-format=json",
            ])
            .args(["--test", "calculus", "--test", "planner", "--target-dir"])
            .arg(target)
            .current_dir(self.directory.path())
            .stderr(Stdio::null())
            .output()
            .expect("cargo runs");
        let messages: Vec<serde_json::Value> = String::from_utf8_lossy(&output.stdout)
            .lines()
            .filter_map(|line| serde_json::from_str(line).ok())
            .collect();
        if output.status.success() {
            let executable = |m: &serde_json::Value| {
                let name = m["target"]["name"].as_str()?.to_owned();
                Some((name, PathBuf::from(m["executable"].as_str()?)))
            };
            let tests = messages.iter().filter_map(executable).collect();
            return Ok(Built {
                tests,
                compiler: self.directory.path().join("compiler"),
            });
        }
        let spans = messages
            .iter()
            .filter(|m| m["message"]["level"] == "error")
            .filter_map(|m| m["message"]["spans"].as_array())
            .flatten();
        let refused: BTreeSet<usize> = spans.filter_map(|span| self.mutant_at(span)).collect();
        assert!(
            !refused.is_empty(),
            "the copy does not build: {messages:#?}"
        );
        Err(refused)
    }

    /// The mutant nearest above the line of an error.
    fn mutant_at(&self, span: &serde_json::Value) -> Option<usize> {
        let file = self.directory.path().join(span["file_name"].as_str()?);
        let text = fs::read_to_string(file).ok()?;
        let end = usize::try_from(span["line_end"].as_u64()?).ok()?;
        let above: Vec<&str> = text.lines().take(end).collect();
        above.iter().rev().find_map(|line| {
            let (_, rest) = line.rsplit_once("mutants::is_active(")?;
            rest.split(|c: char| !c.is_ascii_digit())
                .next()?
                .parse()
                .ok()
        })
    }
}

fn copy(from: &Path, to: &Path) {
    if !from.is_dir() {
        fs::copy(from, to).expect("a copy");
        return;
    }
    fs::create_dir_all(to).expect("a directory");
    for entry in fs::read_dir(from).expect("a directory") {
        let entry = entry.expect("a readable directory");
        if entry.file_name() != "target" {
            copy(&entry.path(), &to.join(entry.file_name()));
        }
    }
}

/// The built tests.
pub(crate) struct Built {
    tests: Vec<(String, PathBuf)>,
    compiler: PathBuf,
}

impl Built {
    /// Without a mutant every test passes.
    pub(crate) fn assert_sound(&self) {
        for step in &STEPS {
            assert!(
                self.passes(step, None),
                "{} fails without any mutant",
                step.program
            );
        }
    }

    /// Whether a test notices a mutant.
    pub(crate) fn is_caught(&self, mutant: usize) -> bool {
        STEPS.iter().any(|step| !self.passes(step, Some(mutant)))
    }

    fn passes(&self, step: &Step, mutant: Option<usize>) -> bool {
        let built = self.tests.iter().find(|(name, _)| name == step.program);
        let (_, path) = built.expect("the test was built");
        let mut command = Command::new("sh");
        command
            .args(["-c", LIMITED, MEMORY, step.seconds])
            .arg(path)
            .args(step.tests)
            .args(step.but.iter().flat_map(|name| ["--skip", name]))
            .args(["-q", "--test-threads=1"])
            .current_dir(&self.compiler)
            .stdout(Stdio::null())
            .stderr(Stdio::null());
        if let Some(mutant) = mutant {
            command.env("DRIFTWRIGHT_MUTANT", mutant.to_string());
        }
        command.status().expect("a shell").success()
    }
}
