//! One canonical layout of a model file: comments kept, meaning untouched.
//!
//! Tables stand in one order with a blank line between them, `=` signs are aligned, formulas have the
//! spaces the printer writes. Nothing is restructured: numbers, names, the order of terms and of
//! declarations stay the author's. [`format()`] proves that: it reads the file before and after and
//! compares everything the two models say, formula by formula.

mod document;
mod formula;
mod meaning;
mod place;
mod table;
mod value;

use crate::diagnostic::{Diagnostic, Diagnostics};
use crate::model::Model;
use crate::source::SourceFile;

/// Why a file was not laid out anew.
#[derive(Clone, Debug)]
pub enum Refusal {
    /// The file has errors: what it means is not known, so it could not be kept.
    Errors(Vec<Diagnostic>),
    /// What the new text would say differently: a fault of the layout, never of the author.
    Meaning(String),
}

/// The text of a model file in its canonical layout. Laying it out again changes nothing.
///
/// # Errors
/// The file has errors, or the layout would change what it means.
///
/// ```
/// use driftwright::front::layout::format;
/// use driftwright::source::SourceFile;
/// let text = "[states.X]\ndrift='-X  + 1' # home\ninitial = \"0\"\n[model]\nname = \"pond\"";
/// let tidy = format(&SourceFile::new("pond.toml", text)).unwrap();
/// assert_eq!(
///     tidy,
///     "[model]\nname = \"pond\"\n\n[states.X]\ninitial = \"0\"\ndrift   = \"-X + 1\"  # home\n"
/// );
/// ```
pub fn format(source: &SourceFile) -> Result<String, Refusal> {
    let before = read(source)?;
    let text = table::write(document::read(source.text()));
    let after = read(&SourceFile::new(source.path(), text.as_str()))?;
    match meaning::difference(&before, &after) {
        None => Ok(text),
        Some(difference) => Err(Refusal::Meaning(difference)),
    }
}

fn read(source: &SourceFile) -> Result<Model, Refusal> {
    let mut diagnostics = Diagnostics::new();
    let model = super::read(source, &mut diagnostics);
    let mut found = diagnostics.finish();
    found.retain(Diagnostic::is_error);
    model.ok_or(Refusal::Errors(found))
}

#[cfg(test)]
mod tests;
