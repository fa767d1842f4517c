//! Running the binary, and looking at what it left behind.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use serde_json::Value;

/// What a call left behind.
pub(crate) struct Ran {
    /// Exit status.
    pub(crate) status: i32,
    /// Standard output.
    pub(crate) out: String,
    /// Standard error.
    pub(crate) err: String,
}

/// The root of the workspace, from which the binary is run.
pub(crate) fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("..")
}

/// The binary, ready for arguments.
pub(crate) fn binary() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_driftwright"));
    command.current_dir(root()).env_remove("NO_COLOR");
    command
}

/// Runs the binary. No panic may ever reach a user.
pub(crate) fn run(arguments: &[&str]) -> Ran {
    let output: Output = binary().args(arguments).output().unwrap();
    let ran = Ran {
        status: output.status.code().unwrap(),
        out: String::from_utf8(output.stdout).unwrap(),
        err: String::from_utf8(output.stderr).unwrap(),
    };
    assert!(!ran.err.contains("panicked"), "{arguments:?}: {}", ran.err);
    ran
}

/// Runs the binary, expects success and JSON.
pub(crate) fn json(arguments: &[&str]) -> Value {
    let ran = run(arguments);
    assert_eq!(ran.status, 0, "{arguments:?}: {}", ran.err);
    serde_json::from_str(&ran.out).unwrap()
}

/// A folder of its own for a test, with a model file in it.
pub(crate) struct Folder(tempfile::TempDir);

impl Folder {
    /// An empty one.
    pub(crate) fn new() -> Self {
        Self(tempfile::tempdir().unwrap())
    }

    /// The path of a file in it.
    pub(crate) fn path(&self, name: &str) -> String {
        self.0.path().join(name).display().to_string()
    }

    /// Writes a file into it and returns its path.
    pub(crate) fn write(&self, name: &str, text: &str) -> String {
        let path = self.path(name);
        std::fs::write(&path, text).unwrap();
        path
    }

    /// The names of the files in it, in order.
    pub(crate) fn files(&self) -> Vec<String> {
        let entries = std::fs::read_dir(self.0.path()).unwrap();
        let mut names: Vec<String> = entries
            .map(|e| e.unwrap().file_name().into_string().unwrap())
            .collect();
        names.sort();
        names
    }
}

/// The text of a shipped model.
pub(crate) fn shipped(model: &str) -> String {
    std::fs::read_to_string(root().join("models").join(model)).unwrap()
}

/// A shipped model with one piece of its text replaced.
pub(crate) fn altered(model: &str, from: &str, to: &str) -> String {
    let text = shipped(model);
    assert!(text.contains(from), "{model} does not contain {from}");
    text.replace(from, to)
}

/// Compares with a golden file; with `UPDATE_GOLDEN=1` in the environment it is written instead.
pub(crate) fn golden(name: &str, text: &str) {
    let path = root().join("tests/golden").join(name);
    if std::env::var_os("UPDATE_GOLDEN").is_some() {
        std::fs::create_dir_all(path.parent().unwrap()).unwrap();
        std::fs::write(&path, text).unwrap();
        return;
    }
    let expected = std::fs::read_to_string(&path).unwrap_or_default();
    for (i, (a, b)) in expected.lines().zip(text.lines()).enumerate() {
        assert_eq!(
            a,
            b,
            "{name}, line {} (UPDATE_GOLDEN=1 rewrites the file)",
            i + 1
        );
    }
    assert_eq!(
        expected.len(),
        text.len(),
        "{name}: one text is longer (UPDATE_GOLDEN=1 rewrites the file)"
    );
}

/// The names of the shipped models, in order.
pub(crate) fn models() -> Vec<String> {
    let entries = std::fs::read_dir(root().join("models")).unwrap();
    let mut names: Vec<String> = entries
        .map(|e| e.unwrap().file_name().into_string().unwrap())
        .filter(|name| name.ends_with(".toml"))
        .collect();
    names.sort();
    assert!(names.len() >= 10);
    names
}
