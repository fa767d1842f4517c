//! Typed access to the entries of a table; what does not fit is reported once.

use super::{Name, RawFormula};
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::front::formula::{self, IntervalAst, parse_interval};
use crate::front::suggest::{nearest, one_of};
use crate::front::text::MappedText;
use crate::front::tree::{Entry, Table, Value, ValueKind};
use crate::source::Span;

/// A table with its known keys.
pub(super) struct Fields<'a, 'd> {
    table: &'a Table,
    /// Misspelt entries under the keys that were likely meant: they are read as those, so that what
    /// stands in them is neither missed nor passed over.
    meant: Vec<(&'static str, &'a Entry)>,
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
        known: &'static [&'static str],
        diagnostics: &'d mut Diagnostics,
    ) -> Self {
        let mut meant = Vec::new();
        for entry in &table.entries {
            if !known.contains(&entry.key.as_str()) {
                diagnostics.push(unknown_key(entry, what, known));
                meant.extend(nearest(&entry.key, known.iter().copied()).map(|key| (key, entry)));
            }
        }
        Self {
            table,
            meant,
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
        let exact = self.table.entries.iter().find(|entry| entry.key == key);
        exact.or_else(|| self.misspelt(key).next())
    }

    /// Entries that were likely meant to have this key.
    fn misspelt(&self, key: &str) -> impl Iterator<Item = &'a Entry> {
        let meant = self.meant.iter().filter(move |(of, _)| *of == key);
        meant.map(|(_, entry)| *entry)
    }

    /// The entries of a table inside this one, in the order of the file; those of misspelt tables too.
    pub(super) fn entries(&mut self, key: &str) -> Vec<&'a Entry> {
        let exact = self.table.entries.iter().find(|entry| entry.key == key);
        let all: Vec<&Entry> = exact.into_iter().chain(self.misspelt(key)).collect();
        let tables = all
            .into_iter()
            .filter_map(|entry| as_table(&entry.value, key, self.diagnostics));
        let mut entries: Vec<&Entry> = tables.flat_map(|table| &table.entries).collect();
        entries.sort_by_key(|entry| entry.key_span);
        entries
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
    let hint = || format!("write a table, [{key}] or {key} = {{ ... }}");
    table_or(value, &format!("`{key}`"), hint, diagnostics)
}

/// A table, or an error that says how to write `what`.
pub(super) fn table_or<'a>(
    value: &'a Value,
    what: &str,
    hint: impl FnOnce() -> String,
    diagnostics: &mut Diagnostics,
) -> Option<&'a Table> {
    if let ValueKind::Table(table) = &value.kind {
        return Some(table);
    }
    let message = format!("{what} is a table, not {}", value.describe());
    diagnostics.push(Diagnostic::error(Code::WrongType, value.span, message).hint(hint()));
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
    // A phrase such as "a driver" needs no quotes.
    let what = if key.contains(' ') {
        key.to_owned()
    } else {
        format!("`{key}`")
    };
    let message = format!("{what} is a string, not {}", value.describe());
    diagnostics
        .push(Diagnostic::error(Code::WrongType, value.span, message).hint(text_hint(key, value)));
    None
}

/// How to write what should have been a string.
fn text_hint(key: &str, value: &Value) -> String {
    match (key, &value.kind) {
        ("domain" | "range", _) => "write an interval in quotes, such as \"(0, inf)\"".to_owned(),
        ("name", _) => "write a name in quotes, such as \"pond\"".to_owned(),
        ("a driver", _) => "write names in quotes, such as \"W\"".to_owned(),
        ("an assumption", _) => "write an inequality in quotes, such as \"a > b\"".to_owned(),
        ("diffusion", _) => {
            "write a formula in quotes, or a table with one a driver: { W = \"...\" }".to_owned()
        }
        (_, ValueKind::Integer(digits, 10) | ValueKind::Float(digits)) => {
            format!("put it in quotes: \"{digits}\"")
        }
        _ => "texts and formulas stand in quotes".to_owned(),
    }
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
    let ValueKind::String(text) = &value.kind else {
        let message = format!("`{key}` is a string, not {}", value.describe());
        let hint = format!("it is {}", one_of(words.iter().copied()));
        diagnostics.push(Diagnostic::error(Code::WrongType, value.span, message).hint(hint));
        return None;
    };
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
