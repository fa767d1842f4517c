//! From a TOML file to the typed model: spanned tree, declarations, formulas, names.
//!
//! [`load`] reads a file, [`read`] turns its text into a [`Model`] and finds as many errors as it can
//! in one run. A part that was at fault is reported once; what depends on it stays silent.

pub mod formula;
pub mod layout;
mod load;
mod names;
mod raw;
mod resolve;
mod schema;
mod suggest;
pub mod text;
mod tree;
mod units;

pub use load::{decode, load};
#[cfg(feature = "cli")]
pub(crate) use names::composed;
pub use resolve::{Place, read_formula};
pub use schema::json_schema;
#[cfg(feature = "cli")]
pub(crate) use suggest::did_you_mean;

use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::model::Model;
use crate::source::SourceFile;

/// Reads a model file: none where an error was found. Warnings leave a model.
///
/// ```
/// use driftwright::diagnostic::Diagnostics;
/// use driftwright::source::SourceFile;
/// let source = SourceFile::new("a.toml", r#"
///     [model]
///     name = "pond"
///     [states.X]
///     initial = "1"
///     drift = "-X"
/// "#);
/// let mut diagnostics = Diagnostics::new();
/// let model = driftwright::front::read(&source, &mut diagnostics).unwrap();
/// assert_eq!(model.pool.format(model.states[0].drift.expr), "-X");
/// assert!(diagnostics.finish().is_empty());
/// ```
pub fn read(source: &SourceFile, diagnostics: &mut Diagnostics) -> Option<Model> {
    let before = diagnostics.error_count();
    let root = tree::parse(source, diagnostics);
    if diagnostics.error_count() > before {
        formulas_only(source, &root, diagnostics);
        return None;
    }
    let raw = raw::read(&root, diagnostics);
    units::check(&raw, diagnostics);
    let model = resolve::resolve(raw, source, diagnostics);
    (diagnostics.error_count() == before).then_some(model)
}

/// After an error in the TOML itself much may be missing, so that only findings inside single formulas
/// on other lines are worth showing.
fn formulas_only(source: &SourceFile, root: &tree::Table, diagnostics: &mut Diagnostics) {
    let line = |d: &Diagnostic| source.position(d.span.start).line;
    let broken: Vec<usize> = diagnostics.iter().map(line).collect();
    let mut found = Diagnostics::new();
    raw::read(root, &mut found);
    let inside = |d: &Diagnostic| (Code::FormulaSyntax..=Code::NestedTooDeep).contains(&d.code);
    for diagnostic in found.finish() {
        if inside(&diagnostic) && !broken.contains(&line(&diagnostic)) {
            diagnostics.push(diagnostic);
        }
    }
}
