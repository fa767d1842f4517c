//! Reading and compiling model files for a command.

use std::io;
use std::path::Path;

use super::{Status, output};
use crate::diagnostic::{Code, Diagnostic, human};
use crate::front;
use crate::pipeline::{self, Compiled};
use crate::report::Derivation;
use crate::source::SourceFile;

/// A model file after all passes.
pub(super) struct Loaded {
    /// The file; empty where it could not be read.
    pub(super) source: SourceFile,
    /// What was found, in the order of the file.
    pub(super) diagnostics: Vec<Diagnostic>,
    /// The compiled model, as far as errors let it come about.
    pub(super) compiled: Option<Compiled>,
}

/// Reads and compiles a file. What is wrong with it is among its diagnostics.
pub(super) fn load(path: &Path) -> Loaded {
    match front::load(path) {
        Ok(source) => compile(source),
        Err(diagnostic) => {
            let source = SourceFile::new(path.display().to_string(), "");
            Loaded {
                source,
                diagnostics: vec![diagnostic],
                compiled: None,
            }
        }
    }
}

/// Compiles a file that was read.
pub(super) fn compile(source: SourceFile) -> Loaded {
    let compilation = pipeline::compile(&source);
    let (diagnostics, compiled) = (compilation.diagnostics, compilation.compiled);
    Loaded {
        source,
        diagnostics,
        compiled,
    }
}

/// Errors about what a person vouches for, not about the file: the evidence is still written.
const NOT_HELD: [Code; 4] = [
    Code::ClaimRefuted,
    Code::NotSignedOff,
    Code::SignoffVoid,
    Code::SignoffUnreadable,
];

impl Loaded {
    /// The status that the diagnostics alone mean: refuted claims and missing sign-offs leave evidence behind, other errors
    /// end the command.
    pub(super) fn status(&self) -> Status {
        let errors = self.diagnostics.iter().filter(|d| d.is_error());
        errors
            .map(|d| {
                if NOT_HELD.contains(&d.code) {
                    Status::NotHeld
                } else {
                    Status::Wrong
                }
            })
            .max()
            .unwrap_or(Status::Well)
    }

    /// Shows the diagnostics on standard error.
    pub(super) fn show_diagnostics(&self) {
        output::note(&human(
            &self.source,
            &self.diagnostics,
            output::colour_on(&io::stderr()),
        ));
    }

    /// The compiled model, unless errors other than refuted claims stand in the way.
    pub(super) fn compiled(&self) -> Option<&Compiled> {
        self.compiled
            .as_ref()
            .filter(|_| self.status() < Status::Wrong)
    }

    /// What the reports read.
    pub(super) fn derivation<'a>(&'a self, compiled: &'a Compiled) -> Derivation<'a> {
        Derivation::new(compiled, &self.diagnostics)
    }
}

/// Reads and compiles a file for a command that needs the model, and shows what was found; none where
/// the model is wrong.
pub(super) fn load_and_show(path: &Path) -> Option<Loaded> {
    let loaded = load(path);
    loaded.show_diagnostics();
    Some(loaded).filter(|l| l.compiled().is_some())
}
