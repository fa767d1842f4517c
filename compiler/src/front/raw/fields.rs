//! Typed access to the entries of a table; what does not fit is reported once.

use super::{Name, RawFormula};
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::front::formula::{self, IntervalAst, parse_interval};
use crate::front::names::composed;
use crate::front::suggest::{nearest, one_of};
use crate::front::text::MappedText;
use crate::front::tree::{Entry, Table, Value, ValueKind};
use crate::source::Span;

/// A table with its known keys.
pub(super) struct Fields<'a, 'd> {
    table: &'a Table,
    /// What the table is, for messages: "a state".
    what: &'static str,
    /// Where to point when a key is missing.
    place: Span,
    pub(super) diagnostics: &'d mut Diagnostics,
}

impl<'a, 'd> Fields<'a, 'd> {
    /// Takes a table and refuses the keys it should not have.
    pub(super) fn new(
        table: &'a Table,
        what: &'static str,
        known: &[&str],
        diagnostics: &'d mut Diagnostics,
    ) -> Self {
        for entry in &table.entries {
            if !known.contains(&entry.key.as_str()) {
                diagnostics.push(unknown_key(entry, what, known));
            }
        }
        Self {
            table,
            what,
            place: table.span,
            diagnostics,
        }
    }

    /// Points at `place` when a key is missing.
    pub(super) fn at(mut self, place: Span) -> Self {
        self.place = place;
        self
    }

    /// The entry of a key.
    pub(super) fn get(&self, key: &str) -> Option<&'a Entry> {
        self.table.entries.iter().find(|entry| entry.key == key)
    }

    /// The entry of a key the table needs.
    pub(super) fn required(&mut self, key: &str) -> Option<&'a Entry> {
        let entry = self.get(key);
        if entry.is_none() {
            let message = format!("`{key}` is missing: {} needs it", self.what);
            self.diagnostics.push(
                Diagnostic::error(Code::MissingKey, self.place, message)
                    .hint(format!("add {key} = \"...\"")),
            );
        }
        entry
    }

    /// A table inside this one.
    pub(super) fn table(&mut self, key: &str) -> Option<&'a Table> {
        let value = &self.get(key)?.value;
        as_table(value, key, self.diagnostics)
    }

    /// Text for people.
    pub(super) fn text(&mut self, key: &str) -> Option<String> {
        let value = &self.get(key)?.value;
        string(value, key, self.diagnostics).map(|text| text.text().to_owned())
    }

    /// Text for people, with its place.
    pub(super) fn placed_text(&mut self, key: &str) -> Option<Name> {
        let value = &self.get(key)?.value;
        string(value, key, self.diagnostics).map(|text| Name {
            text: text.text().to_owned(),
            span: text.span(),
        })
    }

    /// A formula, where the key is there.
    pub(super) fn formula(&mut self, key: &str) -> Option<RawFormula> {
        let value = &self.get(key)?.value;
        formula_of(value, key, self.diagnostics)
    }

    /// A formula the table needs.
    pub(super) fn required_formula(&mut self, key: &str) -> Option<RawFormula> {
        let value = &self.required(key)?.value;
        formula_of(value, key, self.diagnostics)
    }

    /// An interval.
    pub(super) fn interval(&mut self, key: &str) -> Option<IntervalAst> {
        let value = &self.get(key)?.value;
        let text = string(value, key, self.diagnostics)?;
        keep(parse_interval(text), self.diagnostics)
    }
}

/// The value, or its errors to the sink.
pub(super) fn keep<T>(
    result: Result<T, Vec<Diagnostic>>,
    diagnostics: &mut Diagnostics,
) -> Option<T> {
    result
        .map_err(|errors| errors.into_iter().for_each(|d| diagnostics.push(d)))
        .ok()
}

/// A table, or an error.
pub(super) fn as_table<'a>(
    value: &'a Value,
    key: &str,
    diagnostics: &mut Diagnostics,
) -> Option<&'a Table> {
    if let ValueKind::Table(table) = &value.kind {
        return Some(table);
    }
    let message = format!("`{key}` is a table, not {}", value.describe());
    diagnostics.push(
        Diagnostic::error(Code::WrongType, value.span, message)
            .hint(format!("write a table, [{key}] or {key} = {{ ... }}")),
    );
    None
}

/// A string, or an error.
pub(super) fn string<'a>(
    value: &'a Value,
    key: &str,
    diagnostics: &mut Diagnostics,
) -> Option<&'a MappedText> {
    if let ValueKind::String(text) = &value.kind {
        return Some(text);
    }
    let message = format!("`{key}` is a string, not {}", value.describe());
    let diagnostic = Diagnostic::error(Code::WrongType, value.span, message);
    let hint = match &value.kind {
        ValueKind::Integer(digits, 10) => format!("put it in quotes: \"{digits}\""),
        ValueKind::Float(digits) => format!("put it in quotes: \"{digits}\""),
        _ => "texts and formulas stand in quotes".to_owned(),
    };
    diagnostics.push(diagnostic.hint(hint));
    None
}

/// A formula, or its errors.
pub(super) fn formula_of(
    value: &Value,
    key: &str,
    diagnostics: &mut Diagnostics,
) -> Option<RawFormula> {
    let text = string(value, key, diagnostics)?;
    let ast = keep(formula::parse(text), diagnostics)?;
    Some(RawFormula {
        ast,
        text: text.text().trim().to_owned(),
        span: text.span(),
    })
}

/// One of a few words, as its position in `words`.
pub(super) fn choice(
    value: &Value,
    key: &str,
    words: &[&str],
    diagnostics: &mut Diagnostics,
) -> Option<usize> {
    let text = string(value, key, diagnostics)?;
    let found = words.iter().position(|word| *word == text.text());
    if found.is_none() {
        let message = format!("`{key}` cannot be `{}`", text.text());
        let hint = match nearest(text.text(), words.iter().copied()) {
            Some(best) => format!("did you mean `{best}`?"),
            None => format!("it is {}", one_of(words.iter().copied())),
        };
        let diagnostic = Diagnostic::error(Code::UnknownChoice, text.span(), message);
        diagnostics.push(diagnostic.hint(hint));
    }
    found
}

fn unknown_key(entry: &Entry, what: &str, known: &[&str]) -> Diagnostic {
    let thing = if matches!(entry.value.kind, ValueKind::Table(_)) {
        "table"
    } else {
        "key"
    };
    let message = format!("unknown {thing} `{}` in {what}", entry.key);
    let diagnostic = Diagnostic::error(Code::UnknownKey, entry.key_span, message);
    match nearest(&entry.key, known.iter().copied()) {
        Some(best) => diagnostic.hint(format!("did you mean `{best}`?")),
        None => diagnostic.hint(format!("{what} has {}", known.join(", "))),
    }
}

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
    let message = format!("`{}` is not a name", name.text);
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
