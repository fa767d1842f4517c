//! The Markdown writer (CommonMark with tables).

use super::document::{Align, Block, Document, Equation, Inline, Mark, Table};
use super::spell;
use crate::symbolic::Pool;

/// Writes a document as Markdown.
pub fn write(document: &Document) -> String {
    let pool = &document.pool;
    let mut out = format!("# {}\n", escape(&document.title));
    if !document.subtitle.is_empty() {
        out.push_str(&format!("\n{}\n", escape(&document.subtitle)));
    }
    for block in &document.blocks {
        out.push('\n');
        match block {
            Block::Heading { level, text } => {
                let marks = "#".repeat(usize::from(*level) + 1);
                out.push_str(&format!("{marks} {}\n", inline(pool, text)));
            }
            Block::Paragraph(text) => out.push_str(&format!("{}\n", inline(pool, text))),
            Block::List(items) => {
                for item in items {
                    out.push_str(&format!("- {}\n", inline(pool, item)));
                }
            }
            Block::Equations(list) => out.push_str(&equations(pool, list)),
            Block::Table(rows) => out.push_str(&table(pool, rows)),
            Block::Scores(scores) => out.push_str(&format!("{}\n", escape(&scores.in_words()))),
            Block::Diagram(diagram) => {
                for line in diagram.lines() {
                    out.push_str(&format!("- {}\n", escape(&line)));
                }
            }
        }
    }
    out
}

fn equations(pool: &Pool, list: &[Equation]) -> String {
    let lefts: Vec<String> = list.iter().map(|e| spell::math(pool, &e.left)).collect();
    let widest = lefts.iter().map(|l| l.chars().count()).max().unwrap_or(0);
    let mut out = String::from("```text\n");
    for (equation, left) in list.iter().zip(&lefts) {
        let pad = " ".repeat(widest - left.chars().count());
        let line = format!(
            "{left}{pad} {} {}",
            equation.relation,
            spell::math(pool, &equation.right)
        );
        out.push_str(line.trim_end());
        if !equation.remark.is_empty() {
            out.push_str(&format!("    ({})", equation.remark));
        }
        out.push('\n');
    }
    out.push_str("```\n");
    out
}

fn table(pool: &Pool, table: &Table) -> String {
    let heads: Vec<String> = table
        .columns
        .iter()
        .map(|c| cell(&escape(&c.title)))
        .collect();
    let rules: Vec<&str> = table
        .columns
        .iter()
        .map(|c| {
            if c.align == Align::Right {
                "---:"
            } else {
                "---"
            }
        })
        .collect();
    let mut out = format!("| {} |\n| {} |\n", heads.join(" | "), rules.join(" | "));
    for row in &table.rows {
        let cells: Vec<String> = row.iter().map(|text| cell(&inline(pool, text))).collect();
        out.push_str(&format!("| {} |\n", cells.join(" | ")));
    }
    out
}

/// A bar inside a cell would end it.
fn cell(text: &str) -> String {
    text.replace('|', "\\|").replace('\n', " ")
}

fn inline(pool: &Pool, parts: &[Inline]) -> String {
    parts
        .iter()
        .map(|part| match part {
            Inline::Words(words) => escape(&collapse(words)),
            Inline::Marked(Mark::Open, words) => format!("*{}*", escape(words)),
            Inline::Marked(_, words) => format!("**{}**", escape(words)),
            other => literal(&spell::text(pool, std::slice::from_ref(other))),
        })
        .collect()
}

/// Code in as many backticks as its own do not need.
fn literal(text: &str) -> String {
    if text.contains('`') {
        format!("`` {text} ``")
    } else {
        format!("`{text}`")
    }
}

/// Characters that Markdown would read as marks.
fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        if matches!(
            c,
            '\\' | '`' | '*' | '_' | '[' | ']' | '<' | '>' | '#' | '~'
        ) {
            out.push('\\');
        }
        out.push(c);
    }
    out
}

/// Runs of white space as one space, those at the ends included.
fn collapse(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        if !c.is_whitespace() {
            out.push(c);
        } else if !out.ends_with(' ') {
            out.push(' ');
        }
    }
    out
}
