//! Models from text, run by the interpreter.

use std::collections::BTreeMap;

use driftwright::back::interpret::Interpreter;
use driftwright::pipeline::{Compiled, compile};
use driftwright::source::SourceFile;

/// Compiles a model; any error of the model is the test's.
///
/// # Panics
/// With the errors, if the model does not compile.
#[must_use]
pub fn compiled(name: &str, text: &str) -> Compiled {
    let compilation = compile(&SourceFile::new(name, text));
    let errors: Vec<_> = compilation
        .diagnostics
        .iter()
        .filter(|d| d.is_error())
        .collect();
    assert!(errors.is_empty(), "{name}: {errors:#?}");
    compilation.compiled.expect("no errors, so a model")
}

/// The interpreter of a model at given values of some parameters, its own values elsewhere.
///
/// # Panics
/// If the model does not compile or the values are not admissible.
#[must_use]
pub fn interpreter(name: &str, text: &str, values: &BTreeMap<String, f64>) -> Interpreter {
    Interpreter::new(&compiled(name, text).program, values)
        .unwrap_or_else(|e| panic!("{name}: {e}"))
}
