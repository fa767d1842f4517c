//! What a user's build script calls: models to Rust source in the build directory.
//!
//! In `main` of `build.rs`:
//!
//! ```no_run
//! driftwright::build::models(["models/orchard_spot.toml"]);
//! ```
//!
//! and where the simulator is used:
//!
//! ```ignore
//! include!(concat!(env!("OUT_DIR"), "/orchard_spot.rs"));
//! ```

use std::collections::BTreeMap;
use std::io::Write;
use std::path::{Path, PathBuf};

use crate::back::rust;
use crate::diagnostic::human;
use crate::front;
use crate::pipeline::compile;
use crate::program::Program;
use crate::source::SourceFile;

/// Compiles model files and writes each as `<model name>.rs` into the build directory (`OUT_DIR`).
///
/// Paths count from the package's root. Cargo is told to run the build script again when one of the
/// files changes, and only then. What is wrong with a model appears among Cargo's errors, line by line,
/// and the build fails. Returns the step programs of the models that compiled, in order.
///
/// # Panics
/// When it is not called from a build script (there is no `OUT_DIR`).
pub fn models<P: AsRef<Path>>(paths: impl IntoIterator<Item = P>) -> Vec<Program> {
    let directory = std::env::var_os("OUT_DIR").expect(
        "driftwright::build::models is called from a build script, where Cargo sets OUT_DIR",
    );
    let paths: Vec<PathBuf> = paths
        .into_iter()
        .map(|path| path.as_ref().to_path_buf())
        .collect();
    let (programs, messages) = write_models(&paths, Path::new(&directory));
    // Cargo has gone away where its pipe is closed; there is nobody left to tell.
    let _ = std::io::stdout().lock().write_all(messages.as_bytes());
    programs
}

/// A model as the macro and the build script need it.
pub struct Built {
    /// The step program.
    pub program: Program,
    /// Warnings, as people read them; empty where there are none.
    pub warnings: String,
}

/// Compiles one model file; `shown` is its path as the user wrote it.
///
/// # Errors
/// All that is wrong with it, as people read it, with excerpts of the file.
pub fn model(path: &Path, shown: &str) -> Result<Built, String> {
    let source = match front::load(path) {
        Ok(file) => SourceFile::new(shown, file.text()),
        Err(mut diagnostic) => {
            let full = path.display().to_string();
            diagnostic.message = diagnostic.message.replace(&full, shown);
            let hint = diagnostic.hint.take();
            diagnostic.hint =
                hint.map(|hint| hint.replace("the current directory", "the package's root"));
            return Err(human(&SourceFile::new(shown, ""), &[diagnostic], false));
        }
    };
    let compilation = compile(&source);
    let report = human(&source, &compilation.diagnostics, false);
    match compilation.compiled {
        Some(compiled) if !compilation.diagnostics.iter().any(|d| d.is_error()) => Ok(Built {
            program: compiled.program,
            warnings: report,
        }),
        _ => Err(report),
    }
}

/// Writes the models' modules and returns what Cargo is to be told.
fn write_models(paths: &[PathBuf], directory: &Path) -> (Vec<Program>, String) {
    let mut messages = String::new();
    let mut programs = Vec::new();
    let mut written: BTreeMap<String, &Path> = BTreeMap::new();
    for path in paths {
        tell(
            &mut messages,
            "rerun-if-changed",
            &path.display().to_string(),
        );
        match model(path, &path.display().to_string()) {
            Ok(built) => {
                tell(&mut messages, "warning", &built.warnings);
                let name = built.program.name.clone();
                if let Some(other) = written.insert(name.clone(), path) {
                    let both = format!("{} and {}", other.display(), path.display());
                    tell(
                        &mut messages,
                        "error",
                        &format!("two models are named `{name}`: {both}"),
                    );
                }
                let target = directory.join(format!("{name}.rs"));
                let source = rust::generate_source(&built.program);
                if let Err(error) = write_if_changed(&target, &source) {
                    let text = format!("cannot write `{name}.rs`: {error}");
                    tell(&mut messages, "error", &text);
                }
                programs.push(built.program);
            }
            Err(report) => tell(&mut messages, "error", &report),
        }
    }
    (programs, messages)
}

/// One instruction to Cargo per line of text.
fn tell(messages: &mut String, key: &str, text: &str) {
    for line in text.lines().filter(|line| !line.trim().is_empty()) {
        messages.push_str(&format!("cargo::{key}={line}\n"));
    }
}

/// Leaves an unchanged file alone, so that nothing that includes it is compiled again.
fn write_if_changed(path: &Path, text: &str) -> std::io::Result<()> {
    match std::fs::read(path) {
        Ok(old) if old == text.as_bytes() => Ok(()),
        _ => std::fs::write(path, text),
    }
}
