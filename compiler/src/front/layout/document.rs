//! A TOML document as lines with their comments: what a tree of values forgets.
//!
//! Only documents that parsed without an error come here, so the grammar is not checked again.

use toml_parser::Source;
use toml_parser::lexer::{Token, TokenKind};

use super::value::{self, Key, Value};

/// A document.
#[derive(Debug, Default)]
pub(super) struct Document {
    /// Comments before the first table, set apart by a blank line.
    pub(super) prologue: Vec<Trivia>,
    /// Its tables; the first has no header and holds what stands before every header.
    pub(super) sections: Vec<Section>,
    /// Comments after the last table, set apart by a blank line.
    pub(super) epilogue: Vec<Trivia>,
}

/// A table with its header.
#[derive(Debug, Default)]
pub(super) struct Section {
    /// What stands before the header.
    pub(super) leading: Vec<Trivia>,
    /// The key in the brackets.
    pub(super) header: Key,
    /// A comment behind the header.
    pub(super) comment: Option<String>,
    /// Its entries, in the order of the file.
    pub(super) entries: Vec<Entry>,
    /// Comments right after the last entry.
    pub(super) tail: Vec<Trivia>,
}

/// `key = value # comment`
#[derive(Debug)]
pub(super) struct Entry {
    pub(super) leading: Vec<Trivia>,
    pub(super) key: Key,
    pub(super) value: Value,
    pub(super) comment: Option<String>,
}

/// What stands between entries.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Trivia {
    /// One or more blank lines.
    Blank,
    /// A comment on a line of its own, with its `#`.
    Comment(String),
}

/// Cuts a text into a document.
pub(super) fn read(text: &str) -> Document {
    let mut reader = Reader {
        tokens: Tokens::new(text),
        sections: vec![Section::default()],
        pending: Vec::new(),
    };
    while reader.line() {}
    reader.finish()
}

struct Reader<'a> {
    tokens: Tokens<'a>,
    sections: Vec<Section>,
    pending: Vec<Trivia>,
}

impl Reader<'_> {
    /// Reads one line, or one entry of several; false at the end.
    fn line(&mut self) -> bool {
        self.tokens.skip_blanks();
        match self.tokens.kind() {
            TokenKind::Eof => return false,
            TokenKind::Newline => {
                self.tokens.bump();
                if self.pending.last() != Some(&Trivia::Blank) {
                    self.pending.push(Trivia::Blank);
                }
            }
            TokenKind::Comment => {
                let comment = self.tokens.rest_of_line();
                self.pending.extend(comment.map(Trivia::Comment));
            }
            TokenKind::LeftSquareBracket => self.header(),
            _ => self.entry(),
        }
        true
    }

    fn header(&mut self) {
        let leading = self.split_pending();
        self.tokens.bump();
        let header = value::key(&mut self.tokens);
        self.tokens.bump();
        let comment = self.tokens.rest_of_line();
        self.sections.push(Section {
            leading,
            header,
            comment,
            ..Section::default()
        });
    }

    fn entry(&mut self) {
        let key = value::key(&mut self.tokens);
        self.tokens.bump();
        let value = value::value(&mut self.tokens);
        let comment = self.tokens.rest_of_line();
        let entry = Entry {
            leading: std::mem::take(&mut self.pending),
            key,
            value,
            comment,
        };
        self.current().entries.push(entry);
    }

    fn current(&mut self) -> &mut Section {
        self.sections.last_mut().expect("there is always one")
    }

    /// Comments right below an entry or a header belong to it; those after a blank line to what comes
    /// next, and are returned.
    fn split_pending(&mut self) -> Vec<Trivia> {
        let mut pending = std::mem::take(&mut self.pending);
        let nothing_yet = self.sections.len() == 1 && self.current().entries.is_empty();
        if nothing_yet {
            return pending;
        }
        let blank = pending.iter().position(|t| *t == Trivia::Blank);
        let next = pending.split_off(blank.unwrap_or(pending.len()));
        self.current().tail = pending;
        next
    }

    fn finish(mut self) -> Document {
        let epilogue = self.split_pending();
        let mut sections = self.sections;
        let first = match &mut sections[..] {
            [root, next, ..] if root.entries.is_empty() => &mut next.leading,
            [root, ..] if root.entries.is_empty() => &mut root.tail,
            [root, ..] => &mut root.entries[0].leading,
            [] => unreachable!("there is always one"),
        };
        let apart = first.iter().rposition(|t| *t == Trivia::Blank);
        let prologue = first.drain(..apart.map_or(0, |at| at + 1)).collect();
        Document {
            prologue,
            sections,
            epilogue,
        }
    }
}

/// The tokens of a text, with a place among them.
pub(super) struct Tokens<'a> {
    text: &'a str,
    tokens: Vec<Token>,
    at: usize,
}

impl<'a> Tokens<'a> {
    fn new(text: &'a str) -> Self {
        let tokens = Source::new(text).lex().into_vec();
        Self {
            text,
            tokens,
            at: 0,
        }
    }

    /// The kind of the next token; [`TokenKind::Eof`] for ever after the last.
    pub(super) fn kind(&self) -> TokenKind {
        self.tokens.get(self.at).map_or(TokenKind::Eof, Token::kind)
    }

    /// The next token's text.
    pub(super) fn text(&self) -> &'a str {
        self.from(self.start(), self.at + 1)
    }

    /// Where the next token begins.
    pub(super) fn start(&self) -> usize {
        let token = self.tokens.get(self.at);
        token.map_or(self.text.len(), |t| t.span().start())
    }

    /// The text from a byte to the last token taken.
    pub(super) fn since(&self, start: usize) -> &'a str {
        self.from(start, self.at)
    }

    fn from(&self, start: usize, tokens: usize) -> &'a str {
        let last = self.tokens.get(tokens.wrapping_sub(1));
        let end = last.map_or(self.text.len(), |t| t.span().end());
        &self.text[start..end.max(start)]
    }

    /// Goes to the next token.
    pub(super) fn bump(&mut self) {
        self.at += 1;
    }

    /// Goes over spaces and tabs.
    pub(super) fn skip_blanks(&mut self) {
        while self.kind() == TokenKind::Whitespace {
            self.bump();
        }
    }

    /// The comment up to the end of the line, if there is one; goes to the next line.
    fn rest_of_line(&mut self) -> Option<String> {
        self.skip_blanks();
        let mut comment = None;
        if self.kind() == TokenKind::Comment {
            comment = Some(self.text().trim_end().to_owned());
            self.bump();
        }
        if self.kind() == TokenKind::Newline {
            self.bump();
        }
        comment
    }
}
