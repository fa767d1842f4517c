//! Names that the author declares, and what cannot be one.

use super::Name;
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::front::formula;
use crate::front::names::composed;
use crate::front::tree::Entry;

/// The name an entry declares. One that cannot be used is reported and kept, so that formulas that
/// use it do not report it again. `reserved` names are refused where that is set.
pub(super) fn declared(entry: &Entry, reserved: bool, diagnostics: &mut Diagnostics) -> Name {
    let name = Name {
        text: composed(&entry.key),
        span: entry.key_span,
    };
    check(&name, reserved, diagnostics);
    name
}

/// Reports a name that cannot be used.
pub(super) fn check(name: &Name, reserved: bool, diagnostics: &mut Diagnostics) {
    let problem = if reserved {
        name_problem(name)
    } else {
        shape_problem(name)
    };
    problem
        .into_iter()
        .for_each(|diagnostic| diagnostics.push(diagnostic));
}

fn shape_problem(name: &Name) -> Option<Diagnostic> {
    use syn::ext::IdentExt;
    use syn::parse::Parser;
    let spelt = syn::Ident::parse_any.parse_str(&name.text).is_ok();
    if formula::is_name(&name.text) && spelt {
        return None;
    }
    let message = match name.text.as_str() {
        "" => "an empty text is not a name".to_owned(),
        text => format!("`{text}` is not a name"),
    };
    Some(
        Diagnostic::error(Code::BadName, name.span, message)
            .hint("names are letters, digits and `_`, and start with a letter"),
    )
}

fn name_problem(name: &Name) -> Option<Diagnostic> {
    let meaning = match name.text.as_str() {
        "t" => "the time",
        "pi" => "the number pi",
        "inf" => "infinity",
        "self" | "super" | "crate" | "Self" => "a word that generated code cannot use as a name",
        other if crate::symbolic::Function::from_name(other).is_some() => "a function",
        _ => return shape_problem(name),
    };
    let message = format!("`{}` is reserved: it is {meaning}", name.text);
    Some(
        Diagnostic::error(Code::ReservedName, name.span, message)
            .hint(format!("choose another name, such as `{}_0`", name.text)),
    )
}
