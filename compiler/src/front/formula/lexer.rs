//! Characters to tokens.

use unicode_normalization::char::is_combining_mark;

use super::number::{NumberError, decimal};
use crate::diagnostic::{Code, Diagnostic};
use crate::front::names::composed;
use crate::front::text::MappedText;
use crate::source::Span;
use crate::symbolic::Rational;

/// A token and its place in the file.
#[derive(Clone, Debug)]
pub(crate) struct Token {
    pub(crate) kind: Kind,
    pub(crate) span: Span,
}

/// The kinds of tokens.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Kind {
    Number(Rational),
    Name(String),
    /// `+ - * / ^ ( ) , [ ] < <= > >=`
    Sign(&'static str),
    End,
}

const SIGNS: [&str; 14] = [
    "<=", ">=", "+", "-", "*", "/", "^", "(", ")", ",", "[", "]", "<", ">",
];

/// Cuts a text into tokens, the last of which is [`Kind::End`].
///
/// # Errors
/// One diagnostic a bad character or number, at most [`MAX_ERRORS`].
pub(crate) fn tokens(text: &MappedText) -> Result<Vec<Token>, Vec<Diagnostic>> {
    let mut lexer = Lexer {
        text,
        at: 0,
        tokens: Vec::new(),
        errors: Vec::new(),
    };
    while lexer.errors.len() < MAX_ERRORS && lexer.next() {}
    if lexer.errors.is_empty() {
        Ok(lexer.tokens)
    } else {
        Err(lexer.errors)
    }
}

/// Bad characters reported in one formula.
const MAX_ERRORS: usize = 3;

struct Lexer<'a> {
    text: &'a MappedText,
    at: usize,
    tokens: Vec<Token>,
    errors: Vec<Diagnostic>,
}

impl<'a> Lexer<'a> {
    fn rest(&self) -> &'a str {
        &self.text.text()[self.at..]
    }

    /// Takes one token; false at the end.
    fn next(&mut self) -> bool {
        let rest = self.rest();
        self.at += rest.len() - rest.trim_start().len();
        let rest = self.rest();
        let Some(first) = rest.chars().next() else {
            self.push(0, Kind::End);
            return false;
        };
        if first.is_ascii_digit() || first == '.' {
            self.number(rest);
        } else if is_letter(first) {
            let name = name_at(rest);
            self.push(name.len(), Kind::Name(composed(name)));
        } else if let Some(sign) = SIGNS.into_iter().find(|sign| rest.starts_with(sign)) {
            self.push(sign.len(), Kind::Sign(sign));
        } else {
            self.unknown(first);
        }
        true
    }

    fn push(&mut self, length: usize, kind: Kind) {
        let span = self.take(length);
        self.tokens.push(Token { kind, span });
    }

    fn take(&mut self, length: usize) -> Span {
        let start = self.at;
        self.at += length;
        self.text.place(start..self.at)
    }

    fn number(&mut self, rest: &str) {
        let text = number_at(rest);
        match decimal(text) {
            Ok(value) => self.push(text.len(), Kind::Number(value)),
            Err(error) => {
                let span = self.take(text.len());
                self.errors.push(number_error(error, text, span));
            }
        }
    }

    fn unknown(&mut self, c: char) {
        let rest = self.rest();
        if let Some(operator) = FOREIGN.iter().find(|operator| rest.starts_with(**operator)) {
            let span = self.take(operator.len());
            let message = format!("`{operator}` is not used in formulas");
            let hint = "an assumption is one inequality, with <, <=, > or >=";
            self.errors
                .push(Diagnostic::error(Code::UnknownCharacter, span, message).hint(hint));
            return;
        }
        let span = self.take(c.len_utf8());
        let message = if is_invisible(c) {
            format!(
                "the invisible character U+{:04X} is not used in formulas",
                u32::from(c)
            )
        } else {
            format!("`{c}` is not used in formulas")
        };
        let diagnostic = Diagnostic::error(Code::UnknownCharacter, span, message);
        self.errors.push(diagnostic.hint(replacement(c)));
    }
}

/// Operators of other languages.
const FOREIGN: [&str; 4] = ["!=", "==", "&&", "||"];

/// Characters that leave no trace, or change the direction of what follows.
fn is_invisible(c: char) -> bool {
    c.is_control()
        || matches!(c, '\u{ad}' | '\u{200b}'..='\u{200f}' | '\u{202a}'..='\u{202e}'
        | '\u{2060}'..='\u{2069}' | '\u{feff}')
}

/// What the author of an unusual character may have meant.
fn replacement(c: char) -> &'static str {
    match c {
        '²' => "write `^2`",
        '³' => "write `^3`",
        '·' | '×' | '⋅' | '∙' | '∗' => "write `*` for a product",
        '−' | '–' | '—' => "write `-` for a minus sign",
        '÷' | '∕' => "write `/` for a quotient",
        '√' => "write `sqrt(...)`",
        '∞' => "write `inf`, in a range or a domain",
        '≤' => "write `<=`",
        '≥' => "write `>=`",
        '{' | '}' => "only round parentheses group",
        '\'' | '"' => "a formula holds no quotes of its own",
        '=' => "a formula stands without `=`; inequalities are written <, <=, >, >=",
        '_' => "names start with a letter",
        ';' => "arguments and the ends of an interval are separated by `,`",
        '%' => "write 5 % as 0.05",
        '$' | '\\' => "formulas are plain text: x^2, sqrt(x), sigma",
        _ => "remove it",
    }
}

fn number_error(error: NumberError, text: &str, span: Span) -> Diagnostic {
    let (message, hint) = match error {
        NumberError::Malformed if text.starts_with('.') => (
            format!("`{text}` is not a number"),
            format!("write `0{text}`"),
        ),
        NumberError::Malformed => (
            format!("`{text}` is not a number"),
            "numbers are written 12, 0.5, 1e-3".to_owned(),
        ),
        NumberError::TooLong => (
            format!(
                "the number has {} characters, the limit is 1000 digits",
                text.len()
            ),
            "a double precision number holds 17".to_owned(),
        ),
        NumberError::OutOfRange => (
            format!("`{text}` does not fit a double precision number"),
            "change the unit".to_owned(),
        ),
    };
    Diagnostic::error(Code::BadNumber, span, message).hint(hint)
}

/// The longest prefix that looks like a number, well-formed or not. An exponent needs its digits, so
/// that in `2exp(x)` the number is `2`.
fn number_at(rest: &str) -> &str {
    let run = |from: usize| {
        let digit = |c: char| c.is_ascii_digit() || c == '.' || c == '_';
        from + rest[from..]
            .find(|c| !digit(c))
            .unwrap_or(rest.len() - from)
    };
    let end = run(0);
    let exponent = rest[end..].strip_prefix(['e', 'E']);
    let Some(after) = exponent else {
        return &rest[..end];
    };
    let digits = after.strip_prefix(['+', '-']).unwrap_or(after);
    let sign = after.len() - digits.len();
    if digits.starts_with(|c: char| c.is_ascii_digit()) {
        &rest[..run(end + 1 + sign)]
    } else if digits.starts_with(is_letter) {
        &rest[..end]
    } else {
        &rest[..end + 1 + sign]
    }
}

/// Whether names may start with it.
fn is_letter(c: char) -> bool {
    c.is_alphabetic()
}

fn is_part(c: char) -> bool {
    is_letter(c) || c.is_ascii_digit() || c == '_'
}

/// The longest name at the start of `rest`, with accents that are yet to be composed.
fn name_at(rest: &str) -> &str {
    let part = |c: char| is_part(c) || is_combining_mark(c);
    &rest[..rest.find(|c| !part(c)).unwrap_or(rest.len())]
}

/// Whether the whole text, composed, is one name.
pub(crate) fn is_name(text: &str) -> bool {
    text.starts_with(is_letter) && text.chars().all(is_part)
}
