//! Text of TOML strings that knows where each of its characters stands in the file.

use std::ops::Range;

use crate::source::Span;

/// A decoded string with the way back to the file: escapes, line continuations and multi-line
/// strings shift characters, and a diagnostic must still point at what the author typed.
#[derive(Clone, Debug)]
pub struct MappedText {
    text: String,
    span: Span,
    places: Places,
}

#[derive(Clone, Debug)]
enum Places {
    /// Byte `i` of the text is byte `start + i` of the file.
    Shifted(usize),
    /// Where each byte's character begins and ends in the file.
    Table(Vec<(usize, usize)>),
    /// Not known: everything points at the whole string.
    Whole,
}

impl MappedText {
    /// Text that stands in the file as it is, from byte `start`.
    pub fn plain(text: impl Into<String>, start: usize) -> Self {
        let text = text.into();
        let span = Span::new(start, start + text.len());
        Self {
            text,
            span,
            places: Places::Shifted(start),
        }
    }

    /// A TOML string that was decoded to `text`; `raw` is the file's text with its quotes, from byte
    /// `start`.
    pub fn decoded(text: &str, raw: &str, start: usize) -> Self {
        let quotes = if raw.len() >= 6 && (raw.starts_with("\"\"\"") || raw.starts_with("'''")) {
            3
        } else {
            1
        };
        let Some(inner) = raw.get(quotes..raw.len().saturating_sub(quotes)) else {
            let span = Span::new(start, start + raw.len());
            return Self {
                text: text.to_owned(),
                span,
                places: Places::Whole,
            };
        };
        if inner == text {
            return Self::plain(text, start + quotes);
        }
        let span = Span::new(start + quotes, start + raw.len() - quotes);
        // Whether line ends of two characters become one is the TOML parser's choice: try both.
        let walks = [true, false].map(|join| walk(inner, raw.starts_with('"'), join, span.start));
        let places = walks
            .into_iter()
            .find(|(walked, _)| walked == text)
            .map_or(Places::Whole, |(_, table)| Places::Table(table));
        Self {
            text: text.to_owned(),
            span,
            places,
        }
    }

    /// The decoded text.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// The characters of the whole text in the file, without quotes.
    pub fn span(&self) -> Span {
        self.span
    }

    /// Where a range of bytes of the text stands in the file.
    pub fn place(&self, range: Range<usize>) -> Span {
        match &self.places {
            Places::Shifted(start) => Span::new(start + range.start, start + range.end),
            Places::Table(table) => {
                let end_of_text = table.last().map_or(self.span.start, |last| last.1);
                let start = table.get(range.start).map_or(end_of_text, |place| place.0);
                let last = range.end.checked_sub(1).and_then(|last| table.get(last));
                Span::new(start, last.map_or(start, |place| place.1.max(start)))
            }
            Places::Whole => self.span,
        }
    }
}

/// Decodes the inside of a TOML string and notes where each byte comes from. `join` makes one character
/// of a line end of two.
fn walk(inner: &str, escapes: bool, join: bool, start: usize) -> (String, Vec<(usize, usize)>) {
    let mut text = String::with_capacity(inner.len());
    let mut table = Vec::with_capacity(inner.len());
    let mut at = first_line_break(inner);
    while let Some(next) = inner[at..].chars().next() {
        let (decoded, length) = match next {
            '\\' if escapes => escape(&inner[at..]),
            '\r' if join && inner[at..].starts_with("\r\n") => (Some('\n'), 2),
            other => (Some(other), other.len_utf8()),
        };
        if let Some(c) = decoded {
            text.push(c);
            let place = (start + at, start + at + length);
            table.extend(std::iter::repeat_n(place, c.len_utf8()));
        }
        at += length;
    }
    (text, table)
}

/// A line break right after the opening quotes is not part of a multi-line string.
fn first_line_break(inner: &str) -> usize {
    match inner.as_bytes() {
        [b'\n', ..] => 1,
        [b'\r', b'\n', ..] => 2,
        _ => 0,
    }
}

/// The character an escape at the start of `rest` stands for, and how many bytes it takes. A line
/// continuation stands for nothing.
fn escape(rest: &str) -> (Option<char>, usize) {
    let digits = |from: usize, count: usize| {
        // Where the TOML is at fault there may be fewer than the escape calls for.
        let present = rest.bytes().skip(from).take(count);
        let end = from + present.take_while(u8::is_ascii_hexdigit).count();
        let code = u32::from_str_radix(&rest[from..end], 16).ok();
        let whole = end == from + count;
        (code.filter(|_| whole).and_then(char::from_u32), end)
    };
    match rest.as_bytes().get(1) {
        Some(b'b') => (Some('\u{8}'), 2),
        Some(b't') => (Some('\t'), 2),
        Some(b'n') => (Some('\n'), 2),
        Some(b'f') => (Some('\u{c}'), 2),
        Some(b'r') => (Some('\r'), 2),
        Some(b'e') => (Some('\u{1b}'), 2),
        Some(b'"') => (Some('"'), 2),
        Some(b'\\') => (Some('\\'), 2),
        Some(b'x') => digits(2, 2),
        Some(b'u') => digits(2, 4),
        Some(b'U') => digits(2, 8),
        _ => {
            let blank = rest[1..].find(|c: char| !c.is_ascii_whitespace());
            (None, 1 + blank.unwrap_or(rest.len() - 1))
        }
    }
}

#[cfg(test)]
mod tests {
    use super::MappedText;

    fn mapped(raw: &str, text: &str) -> MappedText {
        MappedText::decoded(text, raw, 100)
    }

    #[test]
    fn broken_escapes_do_not_run_past_the_end() {
        for raw in [
            r#""a\u03c""#,
            r#""a\x""#,
            r#""\U0001""#,
            r#""\u03σb""#,
            r#""a\""#,
        ] {
            let text = mapped(raw, "a");
            assert_eq!(text.place(0..1).start, 101, "{raw}");
        }
    }

    #[test]
    fn plain_strings_are_shifted_by_their_quote() {
        let text = mapped("\"mu*S\"", "mu*S");
        assert_eq!(text.place(3..4), (104..105).into());
    }

    #[test]
    fn escapes_point_at_what_was_typed() {
        let text = mapped(r#""\u03c3*S""#, "\u{3c3}*S");
        assert_eq!(text.place(0..2), (101..107).into());
        assert_eq!(text.place(3..4), (108..109).into());
        assert_eq!(text.place(4..4), (109..109).into());
    }

    #[test]
    fn line_continuations_are_skipped() {
        let text = mapped("\"\"\"\nmu \\\n   * S\"\"\"", "mu * S");
        assert_eq!(text.place(0..2), (104..106).into());
        assert_eq!(text.place(3..4), (112..113).into());
    }

    #[test]
    fn windows_line_ends_are_one_character() {
        let text = mapped("'''mu\r\n+ 1'''", "mu\n+ 1");
        assert_eq!(text.place(3..4), (107..108).into());
        let kept = mapped("'''\r\nmu\r\n+ 1'''", "mu\r\n+ 1");
        assert_eq!(kept.place(4..5), (109..110).into());
    }

    #[test]
    fn empty_strings_have_a_place() {
        let text = mapped("\"\"", "");
        assert_eq!(text.place(0..0), (101..101).into());
    }
}
