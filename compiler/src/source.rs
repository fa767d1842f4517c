//! Model files and byte spans in them.

use std::fmt;
use std::ops::Range;
use std::sync::Arc;

/// A half-open range of bytes in a source file. Everything the author wrote keeps its span, down to
/// the operators and names inside a formula string.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Span {
    /// First byte.
    pub start: usize,
    /// One past the last byte.
    pub end: usize,
}

impl Span {
    /// The span of bytes `start..end`.
    pub fn new(start: usize, end: usize) -> Self {
        Self { start, end }
    }

    /// The smallest span that covers both.
    pub fn to(self, other: Self) -> Self {
        Self::new(self.start.min(other.start), self.end.max(other.end))
    }
}

impl From<Range<usize>> for Span {
    fn from(range: Range<usize>) -> Self {
        Self::new(range.start, range.end)
    }
}

/// A line and column, both from 1; columns count Unicode scalar values.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Position {
    /// Line, from 1.
    pub line: usize,
    /// Column in Unicode scalar values, from 1.
    pub column: usize,
}

impl fmt::Display for Position {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:{}", self.line, self.column)
    }
}

/// One model file: the path as the user gave it, and its text.
#[derive(Clone, Debug)]
pub struct SourceFile {
    path: Arc<str>,
    text: Arc<str>,
    line_starts: Arc<[usize]>,
}

impl SourceFile {
    /// A source file from its path (shown to people as given) and text.
    pub fn new(path: impl Into<Arc<str>>, text: impl Into<Arc<str>>) -> Self {
        let text: Arc<str> = text.into();
        let line_starts = std::iter::once(0)
            .chain(text.match_indices('\n').map(|(i, _)| i + 1))
            .collect();
        Self {
            path: path.into(),
            text,
            line_starts,
        }
    }

    /// The path as the user gave it.
    pub fn path(&self) -> &str {
        &self.path
    }

    /// The whole text.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// The text a span covers; empty where the span is out of bounds or cuts a character.
    pub fn slice(&self, span: Span) -> &str {
        self.text.get(span.start..span.end).unwrap_or("")
    }

    /// Line and column of a byte offset; offsets past the end count as the end.
    pub fn position(&self, offset: usize) -> Position {
        let offset = offset.min(self.text.len());
        let line = self.line_starts.partition_point(|&start| start <= offset);
        let start = self.line_starts[line - 1];
        let column = self.text[start..]
            .char_indices()
            .take_while(|(i, _)| start + i < offset)
            .count()
            + 1;
        Position { line, column }
    }
}
