//! The TOML document as a tree with spans, in the order of the file.

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::text::MappedText;
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::source::{SourceFile, Span};

/// A table: `[header]`, dotted keys or `{ inline }`.
#[derive(Clone, Debug)]
pub(super) struct Table {
    /// Its entries, in the order of the file.
    pub(super) entries: Vec<Entry>,
    /// Its place.
    pub(super) span: Span,
}

/// A key with its value.
#[derive(Clone, Debug)]
pub(super) struct Entry {
    pub(super) key: String,
    pub(super) key_span: Span,
    pub(super) value: Value,
}

/// A value and its place.
#[derive(Clone, Debug)]
pub(super) struct Value {
    pub(super) kind: ValueKind,
    pub(super) span: Span,
}

/// The kinds of values.
#[derive(Clone, Debug)]
pub(super) enum ValueKind {
    String(MappedText),
    /// An integer: its digits with their sign, and the base.
    Integer(String, u32),
    /// A float as written, underscores removed.
    Float(String),
    Boolean,
    DateTime,
    Array(Vec<Value>),
    Table(Table),
}

impl Value {
    /// What it is, with its article, for messages.
    pub(super) fn describe(&self) -> &'static str {
        match self.kind {
            ValueKind::String(_) => "a string",
            ValueKind::Integer(..) | ValueKind::Float(_) => "a number",
            ValueKind::Boolean => "a truth value",
            ValueKind::DateTime => "a date or time",
            ValueKind::Array(_) => "a list",
            ValueKind::Table(_) => "a table",
        }
    }
}

/// Syntax errors of TOML shown in one run: later ones are mostly echoes.
const MAX_ERRORS: usize = 5;

/// Parses the document; what is wrong with its syntax goes to `diagnostics`, the rest is recovered.
pub(super) fn parse(source: &SourceFile, diagnostics: &mut Diagnostics) -> Table {
    let (document, errors) = DeTable::parse_recoverable(source.text());
    let mut shown: Vec<usize> = Vec::new();
    let mut repeated = None;
    for error in &errors {
        let span = error.span().map(Span::from).unwrap_or_default();
        let line = source.position(span.start).line;
        if shown.len() >= MAX_ERRORS || shown.contains(&line) {
            continue;
        }
        let duplicate = error.message().contains("duplicate key");
        // The keys below the header of a table that is given twice are given twice too.
        if duplicate && repeated.is_some_and(|header| !another_header(source, header, span)) {
            continue;
        }
        if duplicate && is_header(source, span) {
            repeated = Some(span);
        }
        shown.push(line);
        diagnostics.push(syntax_error(source, error.message(), span));
    }
    let span = document.span().into();
    table(source, document.into_inner(), span)
}

/// Whether a place is in the header of a table.
fn is_header(source: &SourceFile, span: Span) -> bool {
    let before = &source.text()[..span.start.min(source.text().len())];
    let line = before.rsplit('\n').next().unwrap_or_default();
    line.trim_start().starts_with('[')
}

/// Whether a place stands in a header, or below another one than `header`.
fn another_header(source: &SourceFile, header: Span, span: Span) -> bool {
    let between = source.text().get(header.end..span.end).unwrap_or_default();
    between
        .lines()
        .skip(1)
        .any(|line| line.trim_start().starts_with('['))
}

fn syntax_error(source: &SourceFile, message: &str, span: Span) -> Diagnostic {
    let shown = match message {
        "duplicate key" => format!("`{}` is given twice", source.slice(span)),
        _ => format!("TOML: {message}"),
    };
    let diagnostic = Diagnostic::error(Code::TomlSyntax, span, shown);
    let next = source.text()[span.start.min(source.text().len())..]
        .chars()
        .next();
    let hint = match (message, next) {
        (text, _) if text.contains("duplicate key") => "each key may be given once in its table",
        (text, _) if text.contains("carriage return") => "end lines with LF or CR LF",
        (text, _) if text.contains("recur") => "nothing in a model nests this deep",
        (text, _) if text.contains("expected `}`") => "close the table with `}`",
        (text, _) if text.contains("expected `]`") => "close the list with `]`",
        (_, Some(c)) if c.is_control() && c != '\n' && c != '\r' => "remove the control character",
        (_, Some(c)) if !c.is_ascii() => {
            "put keys with letters outside ASCII in quotes, and formulas too"
        }
        (text, _) if text.contains("string") => "formulas and texts stand between two quotes",
        _ => "write key = value, with formulas in quotes",
    };
    diagnostic.hint(hint)
}

fn table(source: &SourceFile, entries: DeTable<'_>, span: Span) -> Table {
    let mut entries: Vec<Entry> = entries
        .into_iter()
        .map(|(key, value)| Entry {
            key_span: key.span().into(),
            key: key.into_inner().into_owned(),
            value: self::value(source, value),
        })
        .collect();
    entries.sort_by_key(|entry| entry.key_span);
    Table { entries, span }
}

fn value(source: &SourceFile, value: Spanned<DeValue<'_>>) -> Value {
    let span: Span = value.span().into();
    let kind = match value.into_inner() {
        DeValue::String(text) => {
            ValueKind::String(MappedText::decoded(&text, source.slice(span), span.start))
        }
        DeValue::Integer(integer) => {
            ValueKind::Integer(integer.as_str().to_owned(), integer.radix())
        }
        DeValue::Float(float) => ValueKind::Float(float.as_str().to_owned()),
        DeValue::Boolean(_) => ValueKind::Boolean,
        DeValue::Datetime(_) => ValueKind::DateTime,
        DeValue::Array(items) => ValueKind::Array(
            items
                .into_iter()
                .map(|item| self::value(source, item))
                .collect(),
        ),
        DeValue::Table(inner) => ValueKind::Table(table(source, inner, span)),
    };
    Value { kind, span }
}
