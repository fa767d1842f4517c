//! Keys and values: reading them with their spelling, and writing them in the canonical one.

use toml_parser::lexer::TokenKind;

use super::document::Tokens;
use super::{formula, place};

/// A key, part by part.
#[derive(Clone, Debug, Default)]
pub(super) struct Key(Vec<Part>);

#[derive(Clone, Debug)]
struct Part {
    /// As it is written.
    spelling: String,
    /// As it is meant, where that needs no decoding.
    name: String,
}

/// A value.
#[derive(Clone, Debug)]
pub(super) enum Value {
    /// Kept as it is: numbers, truth values, strings of several lines or with escapes, and lists and
    /// tables with comments in them.
    Verbatim(String),
    /// A string of one line without escapes.
    Text(String),
    /// A list.
    List(Vec<Value>),
    /// An inline table; `broken` where the author wrote it over several lines.
    Table {
        entries: Vec<(Key, Value)>,
        broken: bool,
    },
}

/// Longest line that a list or an inline table is put on, where the author wrote it over several.
const WIDTH: usize = 120;
const INDENT: &str = "    ";

impl Key {
    /// The canonical spelling.
    pub(super) fn text(&self) -> String {
        let parts: Vec<&str> = self.0.iter().map(|part| part.spelling.as_str()).collect();
        parts.join(".")
    }

    /// The names, from the outside in.
    pub(super) fn names(&self) -> impl Iterator<Item = &str> {
        self.0.iter().map(|part| part.name.as_str())
    }

    /// The names behind those of a table.
    pub(super) fn below<'a>(&'a self, table: &[&'a str]) -> Vec<&'a str> {
        table.iter().copied().chain(self.names()).collect()
    }

    /// Whether it is that of no table: the start of the file.
    pub(super) fn is_empty(&self) -> bool {
        self.0.is_empty()
    }
}

/// Reads a key up to its `=` or `]`, which is left.
pub(super) fn key(tokens: &mut Tokens<'_>) -> Key {
    let mut parts = Vec::new();
    loop {
        match tokens.kind() {
            TokenKind::Equals | TokenKind::RightSquareBracket | TokenKind::Eof => break,
            TokenKind::Whitespace | TokenKind::Dot | TokenKind::Newline => {}
            _ => parts.push(part(tokens.text())),
        }
        tokens.bump();
    }
    Key(parts)
}

fn part(text: &str) -> Part {
    let name = match one_line(text) {
        Some(inner) => inner,
        None => text,
    };
    let bare = |c: char| c.is_ascii_alphanumeric() || c == '_' || c == '-';
    let spelling = if !name.is_empty() && name.chars().all(bare) {
        name.to_owned()
    } else {
        quoted(name).unwrap_or_else(|| text.to_owned())
    };
    Part {
        spelling,
        name: name.to_owned(),
    }
}

/// The inside of a string of one line that stands for itself.
fn one_line(text: &str) -> Option<&str> {
    let several = text.starts_with("\"\"\"") || text.starts_with("'''");
    let basic = || text.strip_prefix('"')?.strip_suffix('"');
    let literal = || text.strip_prefix('\'')?.strip_suffix('\'');
    let inner = if several && text.len() >= 6 {
        None
    } else {
        basic().filter(|s| !s.contains('\\')).or_else(literal)
    };
    inner.filter(|s| !s.contains('\n'))
}

/// A text between double quotes, where it needs no escapes.
fn quoted(text: &str) -> Option<String> {
    let plain = !text.contains(['"', '\\']);
    plain.then(|| format!("\"{text}\""))
}

/// Reads a value.
pub(super) fn value(tokens: &mut Tokens<'_>) -> Value {
    tokens.skip_blanks();
    let start = tokens.start();
    let mut commented = false;
    let value = match tokens.kind() {
        TokenKind::LeftSquareBracket => list(tokens, &mut commented),
        TokenKind::LeftCurlyBracket => table(tokens, &mut commented),
        _ => scalar(tokens),
    };
    if commented {
        return Value::Verbatim(tokens.since(start).replace("\r\n", "\n"));
    }
    value
}

fn scalar(tokens: &mut Tokens<'_>) -> Value {
    let start = tokens.start();
    while matches!(
        tokens.kind(),
        TokenKind::Atom
            | TokenKind::Dot
            | TokenKind::BasicString
            | TokenKind::LiteralString
            | TokenKind::MlBasicString
            | TokenKind::MlLiteralString
    ) {
        tokens.bump();
    }
    let text = tokens.since(start);
    match one_line(text).filter(|inner| quoted(inner).is_some()) {
        Some(inner) => Value::Text(inner.to_owned()),
        None => Value::Verbatim(text.replace("\r\n", "\n")),
    }
}

fn list(tokens: &mut Tokens<'_>, commented: &mut bool) -> Value {
    let mut items = Vec::new();
    tokens.bump();
    while separators(tokens, commented, &mut false) != TokenKind::RightSquareBracket {
        items.push(nested(tokens, commented));
    }
    tokens.bump();
    Value::List(items)
}

fn table(tokens: &mut Tokens<'_>, commented: &mut bool) -> Value {
    let (mut entries, mut broken) = (Vec::new(), false);
    tokens.bump();
    while separators(tokens, commented, &mut broken) != TokenKind::RightCurlyBracket {
        let key = key(tokens);
        tokens.bump();
        entries.push((key, nested(tokens, commented)));
    }
    tokens.bump();
    Value::Table { entries, broken }
}

/// A value inside another: a comment in it is one in the whole.
fn nested(tokens: &mut Tokens<'_>, commented: &mut bool) -> Value {
    tokens.skip_blanks();
    match tokens.kind() {
        TokenKind::LeftSquareBracket => list(tokens, commented),
        TokenKind::LeftCurlyBracket => table(tokens, commented),
        _ => scalar(tokens),
    }
}

/// Goes over what separates values, notes comments and line breaks, and looks at what comes next.
fn separators(tokens: &mut Tokens<'_>, commented: &mut bool, broken: &mut bool) -> TokenKind {
    loop {
        match tokens.kind() {
            TokenKind::Comment => *commented = true,
            TokenKind::Newline => *broken = true,
            TokenKind::Whitespace | TokenKind::Comma => {}
            // A value that is cut short cannot come here; the end closes everything all the same.
            TokenKind::Eof => return TokenKind::RightSquareBracket,
            other => return other,
        }
        tokens.bump();
    }
}

impl Value {
    /// The canonical spelling of a value whose place in the file is `path`, from column `column` on.
    pub(super) fn text(&self, path: &[&str], column: usize) -> String {
        match self {
            Self::Verbatim(text) => text.clone(),
            Self::Text(text) if place::is_formula(path) => {
                format!("\"{}\"", formula::spaced(text).as_ref().unwrap_or(text))
            }
            Self::Text(text) => format!("\"{text}\""),
            Self::List(items) => {
                let items: Vec<String> = items.iter().map(|item| item.text(path, 0)).collect();
                let line = format!("[{}]", items.join(", "));
                if column > 0 && column + line.chars().count() > WIDTH {
                    filled(&items)
                } else {
                    line
                }
            }
            Self::Table { entries, broken } => {
                let entries = table_entries(entries, path);
                if entries.is_empty() {
                    return "{}".to_owned();
                }
                let line = format!("{{ {} }}", entries.join(", "));
                if *broken && column > 0 && column + line.chars().count() > WIDTH {
                    let separator = format!(",\n{INDENT}");
                    format!("{{\n{INDENT}{}\n}}", entries.join(&separator))
                } else {
                    line
                }
            }
        }
    }
}

fn table_entries(entries: &[(Key, Value)], path: &[&str]) -> Vec<String> {
    let mut entries: Vec<&(Key, Value)> = entries.iter().collect();
    entries.sort_by_key(|(key, _)| place::rank(path, key.names().next().unwrap_or_default()));
    entries
        .into_iter()
        .map(|(key, value)| {
            let text = value.text(&key.below(path), 0);
            format!("{} = {text}", key.text())
        })
        .collect()
}

/// A list over several lines, each as full as it goes.
fn filled(items: &[String]) -> String {
    let mut text = String::from("[");
    let mut column = usize::MAX;
    for item in items {
        let length = item.chars().count() + 2;
        if column.saturating_add(length) > WIDTH {
            text.push('\n');
            text.push_str(INDENT);
            column = INDENT.len();
        } else {
            text.push(' ');
        }
        text.push_str(item);
        text.push(',');
        column += length;
    }
    text.push_str("\n]");
    text
}
