//! `[states]`, `[where]`, `[derived]` and `[readouts]`.

use super::declared::declared;
use super::fields::{Fields, as_table, choice, formula_of, string, table_or};
use super::{Name, PerDriver, RawEdge, RawNamed, RawState, keys};
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::front::names::composed;
use crate::front::tree::{Entry, Table, Value, ValueKind};
use crate::model::AtEdge;
use crate::model::SchemeName;
use crate::source::Span;

/// `[states.X]`
pub(super) fn states(root: &mut Fields<'_, '_>) -> Vec<RawState> {
    let entries = root.entries("states");
    let declared = root.get("states");
    let is_table = |entry: &Entry| matches!(entry.value.kind, ValueKind::Table(_));
    if entries.is_empty() && declared.is_none_or(is_table) {
        let place = declared.map_or(Span::default(), |entry| entry.key_span);
        root.diagnostics.push(
            Diagnostic::error(Code::MissingKey, place, "the model has no state")
                .hint("add [states.X] with initial = \"...\" and drift = \"...\""),
        );
    }
    entries
        .into_iter()
        .map(|entry| state(entry, root.diagnostics))
        .collect()
}

fn state(entry: &Entry, diagnostics: &mut Diagnostics) -> RawState {
    let name = declared(entry, true, diagnostics);
    let mut state = RawState {
        name,
        ..RawState::default()
    };
    let hint = || {
        format!(
            "write [states.{}] in single brackets, with its keys below",
            entry.key
        )
    };
    let Some(table) = table_or(&entry.value, "a state", hint, diagnostics) else {
        return state;
    };
    let mut fields = Fields::new(table, "a state", keys::STATE, diagnostics).at(entry.key_span);
    state.about = fields.text("about");
    state.unit = fields.placed_text("unit");
    state.initial = fields.required_formula("initial");
    state.drift = fields.required_formula("drift");
    let diffusion = fields.get("diffusion");
    state.diffusion = diffusion.and_then(|e| per_driver(&e.value, "diffusion", fields.diagnostics));
    state.domain = fields.interval("domain");
    let edge = fields.get("at_edge");
    state.at_edge = edge.and_then(|e| at_edge(&e.value, fields.diagnostics));
    state.through = fields.formula("through");
    state.scheme = fields
        .get("scheme")
        .and_then(|e| scheme(&e.value, fields.diagnostics));
    state
}

/// A formula, or a table of one a driver. A table keeps the entries that can be read.
pub(super) fn per_driver(
    value: &Value,
    key: &str,
    diagnostics: &mut Diagnostics,
) -> Option<PerDriver> {
    let ValueKind::Table(table) = &value.kind else {
        return formula_of(value, key, diagnostics).map(PerDriver::Single);
    };
    let formulas = table.entries.iter().filter_map(|entry| {
        let name = Name {
            text: composed(&entry.key),
            span: entry.key_span,
        };
        Some((name, formula_of(&entry.value, key, diagnostics)?))
    });
    Some(PerDriver::Table(formulas.collect()))
}

fn at_edge(value: &Value, diagnostics: &mut Diagnostics) -> Option<RawEdge> {
    let ValueKind::Table(table) = &value.kind else {
        return edge_word(value, diagnostics).map(|(edge, span)| RawEdge::Both(edge, span));
    };
    if table.entries.is_empty() {
        diagnostics.push(
            Diagnostic::error(Code::MissingKey, value.span, "`at_edge` says nothing")
                .hint("write lower = \"...\", upper = \"...\" or both, or leave `at_edge` out"),
        );
    }
    let fields = Fields::new(table, "`at_edge`", keys::EDGES, diagnostics);
    let (lower, upper) = (fields.get("lower"), fields.get("upper"));
    Some(RawEdge::Ends {
        lower: lower.and_then(|entry| edge_word(&entry.value, diagnostics)),
        upper: upper.and_then(|entry| edge_word(&entry.value, diagnostics)),
    })
}

fn edge_word(value: &Value, diagnostics: &mut Diagnostics) -> Option<(AtEdge, Span)> {
    let word = choice(value, "at_edge", keys::EDGE_WORDS, diagnostics)?;
    let edges = [AtEdge::Absorb, AtEdge::Reflect, AtEdge::AsEquation];
    Some((edges[word], string(value, "at_edge", diagnostics)?.span()))
}

fn scheme(value: &Value, diagnostics: &mut Diagnostics) -> Option<(SchemeName, Span)> {
    let names = SchemeName::ALL.map(SchemeName::name);
    let position = choice(value, "scheme", &names, diagnostics)?;
    Some((
        SchemeName::ALL[position],
        string(value, "scheme", diagnostics)?.span(),
    ))
}

/// `[where]`: a formula a name.
pub(super) fn wheres(root: &mut Fields<'_, '_>) -> Vec<RawNamed> {
    let entries = root.entries("where").into_iter();
    entries
        .map(|entry| {
            let name = declared(entry, true, root.diagnostics);
            let formula = formula_of(&entry.value, &entry.key, root.diagnostics);
            RawNamed {
                name,
                formula,
                about: None,
                unit: None,
            }
        })
        .collect()
}

/// `[derived.X]` or `[readouts.X]`
pub(super) fn named(root: &mut Fields<'_, '_>, section: &str) -> Vec<RawNamed> {
    let entries = root.entries(section).into_iter();
    entries
        .map(|entry| named_entry(entry, root.diagnostics))
        .collect()
}

fn named_entry(entry: &Entry, diagnostics: &mut Diagnostics) -> RawNamed {
    let name = declared(entry, true, diagnostics);
    let Some(table) = named_table(entry, diagnostics) else {
        return RawNamed {
            name,
            formula: None,
            about: None,
            unit: None,
        };
    };
    let what = "a derived quantity or readout";
    let mut fields = Fields::new(table, what, keys::NAMED, diagnostics).at(entry.key_span);
    let formula = fields.required_formula("formula");
    RawNamed {
        name,
        formula,
        about: fields.text("about"),
        unit: fields.placed_text("unit"),
    }
}

fn named_table<'a>(entry: &'a Entry, diagnostics: &mut Diagnostics) -> Option<&'a Table> {
    if let ValueKind::String(_) = entry.value.kind {
        let message = format!("`{}` is a table with a `formula`, not a string", entry.key);
        diagnostics.push(
            Diagnostic::error(Code::WrongType, entry.value.span, message)
                .hint(format!("write {} = {{ formula = \"...\" }}", entry.key)),
        );
        return None;
    }
    as_table(&entry.value, &entry.key, diagnostics)
}
