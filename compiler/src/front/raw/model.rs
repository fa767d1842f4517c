//! `[model]`.

use super::declared::check;
use super::fields::{Fields, choice, string};
use super::{Name, RawModel, keys};
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::front::names::composed;
use crate::front::text::MappedText;
use crate::front::tree::{Entry, ValueKind};
use crate::model::Calculus;
use crate::source::Span;

pub(super) fn read(root: &mut Fields<'_, '_>, raw: &mut RawModel) {
    // Until the drivers have been read, any name may be one.
    raw.drivers_at_fault = true;
    let Some(entry) = root.get("model") else {
        root.diagnostics.push(
            Diagnostic::error(
                Code::MissingKey,
                Span::default(),
                "the table `[model]` is missing",
            )
            .hint("start the file with [model] and name = \"...\""),
        );
        return;
    };
    let Some(table) = root.table("model") else {
        return;
    };
    let mut fields =
        Fields::new(table, "`[model]`", keys::MODEL, root.diagnostics).at(entry.key_span);
    raw.name = fields
        .required("name")
        .and_then(|name| model_name(name, fields.diagnostics));
    raw.title = fields.text("title");
    raw.about = fields.text("about");
    raw.time_unit = fields.placed_text("time_unit");
    raw.calculus = fields.get("calculus").and_then(|entry| {
        let word = choice(&entry.value, "calculus", keys::CALCULI, fields.diagnostics)?;
        Some([Calculus::Ito, Calculus::Stratonovich][word])
    });
    let before = fields.diagnostics.error_count();
    raw.drivers = fields
        .get("drivers")
        .map_or(Vec::new(), |entry| drivers(entry, fields.diagnostics));
    raw.drivers_at_fault = fields.diagnostics.error_count() > before;
}

fn model_name(entry: &Entry, diagnostics: &mut Diagnostics) -> Option<String> {
    let text = string(&entry.value, "name", diagnostics)?;
    let name = text.text();
    let snake = |c: char| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '_';
    let word = matches!(name, "self" | "super" | "crate" | "_");
    if name.starts_with(|c: char| c.is_ascii_lowercase()) && name.chars().all(snake) && !word {
        return Some(name.to_owned());
    }
    let message = format!("`{name}` is not a snake_case name");
    let hint = match snake_case(name) {
        Some(better) => format!("the name becomes a module's: write \"{better}\""),
        None => "write small ASCII letters, digits and `_`, a letter first".to_owned(),
    };
    diagnostics.push(Diagnostic::error(Code::BadName, text.span(), message).hint(hint));
    None
}

/// The nearest snake_case name.
fn snake_case(name: &str) -> Option<String> {
    let mut out = String::new();
    for c in name.trim().chars() {
        if c.is_ascii_alphanumeric() {
            let capital = c.is_ascii_uppercase();
            if capital && out.ends_with(|last: char| last.is_ascii_lowercase()) {
                out.push('_');
            }
            out.push(c.to_ascii_lowercase());
        } else if !out.is_empty() && !out.ends_with('_') {
            out.push('_');
        }
    }
    let out = out.trim_matches('_');
    out.starts_with(|c: char| c.is_ascii_lowercase())
        .then(|| out.to_owned())
}

fn drivers(entry: &Entry, diagnostics: &mut Diagnostics) -> Vec<Name> {
    let ValueKind::Array(items) = &entry.value.kind else {
        let message = format!(
            "`drivers` is a list of names, not {}",
            entry.value.describe()
        );
        diagnostics.push(
            Diagnostic::error(Code::WrongType, entry.value.span, message)
                .hint("write drivers = [\"W\"]"),
        );
        return Vec::new();
    };
    let texts: Vec<&MappedText> = items
        .iter()
        .filter_map(|item| string(item, "a driver", diagnostics))
        .collect();
    let names = texts.into_iter().map(|text| {
        let name = Name {
            text: composed(text.text()),
            span: text.span(),
        };
        check(&name, true, diagnostics);
        name
    });
    names.collect()
}
