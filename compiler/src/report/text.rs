//! The plain-text writer: a document for a terminal.

use std::borrow::Cow;

use super::document::{Align, Block, Document, Equation, Inline, Mark, Table};
use super::spell;
use super::wrap::{self, width};
use crate::symbolic::Pool;

/// How the text looks.
#[derive(Clone, Copy, Debug)]
pub struct Style {
    /// Columns of a line.
    pub columns: usize,
    /// Whether to use the terminal's colours.
    pub colour: bool,
}

impl Default for Style {
    /// A hundred columns, no colour.
    fn default() -> Self {
        Self {
            columns: 100,
            colour: false,
        }
    }
}

const INDENT: &str = "  ";

/// Columns beyond which the left side of an equation gets a line of its own.
const LEFT_SIDE: usize = 36;

/// Columns beyond which an equation no longer sets the column of the remarks.
const REMARKS_FROM: usize = 32;

/// Writes a document as plain text.
pub fn write(document: &Document, style: Style) -> String {
    let mut writer = Writer {
        pool: &document.pool,
        style,
        out: String::new(),
    };
    writer.title(document);
    for block in &document.blocks {
        writer.block(block);
    }
    writer.out
}

struct Writer<'a> {
    pool: &'a Pool,
    style: Style,
    out: String,
}

impl Writer<'_> {
    fn title(&mut self, document: &Document) {
        if document.title.is_empty() {
            return;
        }
        let title = self.paint(Mark::Strong, &document.title).into_owned();
        self.line(&title);
        if !document.subtitle.is_empty() {
            self.line(&document.subtitle);
        }
        let rule = width(&document.title)
            .max(width(&document.subtitle))
            .min(self.style.columns);
        self.line(&"═".repeat(rule));
    }

    fn block(&mut self, block: &Block) {
        match block {
            Block::Heading { level: 1, text } => {
                let text = spell::text(self.pool, text);
                self.gap();
                let rule = "─".repeat(width(&text));
                let head = self.paint(Mark::Strong, &text).into_owned();
                self.line(&head);
                self.line(&rule);
            }
            Block::Heading { text, .. } => {
                let text = spell::text(self.pool, text);
                self.gap_below_text();
                let head = self.paint(Mark::Strong, &text).into_owned();
                for line in wrap::words(&head, self.style.columns) {
                    self.line(&line);
                }
            }
            Block::Paragraph(text) => {
                self.gap_below_text();
                let words = self.inline(text);
                for line in wrap::words(&words, self.style.columns) {
                    self.line(&line);
                }
            }
            Block::List(items) => {
                for item in items {
                    let words = self.inline(item);
                    let lines = wrap::words(&words, self.style.columns - 4);
                    for (i, line) in lines.iter().enumerate() {
                        let lead = if i == 0 { "  - " } else { "    " };
                        self.line(&format!("{lead}{line}"));
                    }
                }
            }
            Block::Equations(equations) => self.equations(equations),
            Block::Table(table) => self.table(table),
            Block::Scores(scores) => {
                for line in wrap::words(&scores.in_words(), self.style.columns) {
                    self.line(&line);
                }
            }
            Block::Diagram(diagram) => {
                for line in diagram.lines() {
                    for line in wrap::words(&line, self.style.columns - 4) {
                        self.line(&format!("{INDENT}{line}"));
                    }
                }
            }
        }
    }

    fn line(&mut self, line: &str) {
        self.out.push_str(line.trim_end());
        self.out.push('\n');
    }

    fn gap(&mut self) {
        if !self.out.is_empty() && !self.out.ends_with("\n\n") {
            self.out.push('\n');
        }
    }

    /// Paragraphs and parts are set apart from what stands above, unless that is a section's head.
    fn gap_below_text(&mut self) {
        let last = self.out.lines().next_back().unwrap_or("");
        if !last.starts_with(['─', '═']) && !last.is_empty() {
            self.gap();
        }
    }

    fn paint<'t>(&self, mark: Mark, text: &'t str) -> Cow<'t, str> {
        if !self.style.colour {
            return Cow::Borrowed(text);
        }
        let start = match mark {
            Mark::Strong => "1",
            Mark::Good => "32",
            Mark::Bad => "1;31",
            Mark::Open => "33",
        };
        Cow::Owned(format!("\u{1b}[{start}m{text}\u{1b}[0m"))
    }

    fn inline(&self, parts: &[Inline]) -> String {
        parts
            .iter()
            .map(|part| match part {
                Inline::Marked(mark, words) => self.paint(*mark, words).into_owned(),
                other => spell::text(self.pool, std::slice::from_ref(other)),
            })
            .collect()
    }

    fn equations(&mut self, equations: &[Equation]) {
        let sides: Vec<(String, String)> = equations
            .iter()
            .map(|e| {
                (
                    spell::math(self.pool, &e.left),
                    spell::math(self.pool, &e.right),
                )
            })
            .collect();
        let fitting = |l: usize| Some(l).filter(|l| *l <= LEFT_SIDE);
        let left = sides
            .iter()
            .filter_map(|(l, _)| fitting(width(l)))
            .max()
            .unwrap_or(0);
        let relation = equations
            .iter()
            .map(|e| width(e.relation))
            .max()
            .unwrap_or(0);
        let hang = INDENT.len() + left + relation + 2;
        let room = self.style.columns.saturating_sub(hang).max(20);
        let bodies: Vec<Vec<String>> = sides.iter().map(|(_, r)| wrap::formula(r, room)).collect();
        // Remarks stand in one column behind the short equations; a long one pushes its own away.
        let short = |b: &&Vec<String>| b.len() == 1 && width(&b[0]) <= REMARKS_FROM;
        let widest = bodies
            .iter()
            .filter(short)
            .map(|b| width(&b[0]))
            .max()
            .unwrap_or(0);
        for ((equation, (l, _)), body) in equations.iter().zip(&sides).zip(&bodies) {
            let mut l = l.as_str();
            if width(l) > LEFT_SIDE {
                // Too long to stand beside: the equation follows below.
                self.line(&format!("{INDENT}{l}"));
                l = "";
            }
            let pad = " ".repeat(left - width(l));
            let lead = format!("{INDENT}{l}{pad} {:<relation$} ", equation.relation);
            self.equation(&lead, body, widest, hang, &equation.remark);
        }
    }

    /// One equation: its remark stands beside it where there is room, else below.
    fn equation(&mut self, lead: &str, body: &[String], widest: usize, hang: usize, remark: &str) {
        let end = widest.max(body.first().map_or(0, |b| width(b)));
        let beside = body.len() == 1 && hang + end + 3 + width(remark) <= self.style.columns;
        for (i, piece) in body.iter().enumerate() {
            let lead = if i == 0 {
                lead.to_owned()
            } else {
                " ".repeat(hang + 2)
            };
            if beside && !remark.is_empty() {
                let pad = " ".repeat(widest.saturating_sub(width(piece)) + 3);
                self.line(&format!("{lead}{piece}{pad}{remark}"));
            } else {
                self.line(&format!("{lead}{piece}"));
            }
        }
        if !beside && !remark.is_empty() {
            for line in wrap::words(remark, self.style.columns.saturating_sub(hang).max(20)) {
                self.line(&format!("{}{line}", " ".repeat(hang)));
            }
        }
    }

    fn table(&mut self, table: &Table) {
        let cells: Vec<Vec<String>> = table
            .rows
            .iter()
            .map(|row| row.iter().map(|cell| self.inline(cell)).collect())
            .collect();
        let mut widths: Vec<usize> = table.columns.iter().map(|c| width(&c.title)).collect();
        for row in &cells {
            for (w, cell) in widths.iter_mut().zip(row) {
                *w = (*w).max(width(cell));
            }
        }
        let fixed: Vec<bool> = table
            .columns
            .iter()
            .map(|c| c.align == Align::Right)
            .collect();
        wrap::fit(
            &mut widths,
            &fixed,
            self.style.columns.saturating_sub(INDENT.len()),
            2,
        );
        if table.columns.iter().any(|c| !c.title.is_empty()) {
            let heads: Vec<Vec<String>> = table
                .columns
                .iter()
                .zip(&widths)
                .map(|(c, w)| {
                    wrap::words(&c.title, *w)
                        .iter()
                        .map(|l| self.paint(Mark::Strong, l).into_owned())
                        .collect()
                })
                .collect();
            self.row(table, &heads, &widths);
        }
        for row in &cells {
            let wrapped: Vec<Vec<String>> = row
                .iter()
                .zip(&widths)
                .map(|(cell, w)| wrap::words(cell, *w))
                .collect();
            self.row(table, &wrapped, &widths);
        }
    }

    fn row(&mut self, table: &Table, cells: &[Vec<String>], widths: &[usize]) {
        let height = cells.iter().map(Vec::len).max().unwrap_or(0);
        for i in 0..height {
            let mut line = String::from(INDENT);
            for (j, (cell, w)) in cells.iter().zip(widths).enumerate() {
                let piece = cell.get(i).map_or("", String::as_str);
                let pad = " ".repeat(w.saturating_sub(width(piece)));
                match table.columns[j].align {
                    Align::Left => line.extend([piece, &pad]),
                    Align::Right => line.extend([pad.as_str(), piece]),
                }
                line.push_str("  ");
            }
            self.line(&line);
        }
    }
}
