//! Writing the tables: order, blank lines, alignment.

use super::document::{Document, Entry, Section, Trivia};
use super::place;

/// The canonical text of a document.
pub(super) fn write(mut document: Document) -> String {
    // Tables of one kind keep their order, which has a meaning.
    document.sections[1..].sort_by_key(|section| rank(&[], &section.header));
    let mut blocks = vec![trimmed(&document.prologue)];
    blocks.extend(document.sections.into_iter().map(section));
    blocks.push(trimmed(&document.epilogue));
    blocks.retain(|block| !block.is_empty());
    let blocks: Vec<String> = blocks.iter().map(|lines| lines.join("\n")).collect();
    blocks.join("\n\n") + "\n"
}

fn rank(table: &[&str], key: &super::value::Key) -> usize {
    place::rank(table, key.names().next().unwrap_or_default())
}

/// One table, its header first.
fn section(mut section: Section) -> Vec<String> {
    let names: Vec<&str> = section.header.names().collect();
    section
        .entries
        .sort_by_key(|entry| rank(&names, &entry.key));
    let mut out = lines(&section.leading, true);
    if !section.header.is_empty() {
        let header = format!("[{}]", section.header.text());
        out.push(commented(header, section.comment.as_deref()));
    }
    out.extend(entries(&section.entries, &names));
    out.extend(trimmed(&section.tail));
    out
}

/// The entries of a table: equality signs in one column, and in neighbouring lines the comments behind
/// the values too.
fn entries(entries: &[Entry], table: &[&str]) -> Vec<String> {
    let keys: Vec<String> = entries.iter().map(|entry| entry.key.text()).collect();
    let width = keys.iter().map(|key| key.chars().count()).max();
    let width = width.unwrap_or(0);
    let texts: Vec<String> = entries
        .iter()
        .zip(&keys)
        .map(|(entry, key)| {
            let value = entry.value.text(&entry.key.below(table), width + 3);
            format!("{key:width$} = {value}")
        })
        .collect();
    let columns = comment_columns(entries, &texts);
    let mut out = Vec::new();
    for (position, (entry, text)) in entries.iter().zip(&texts).enumerate() {
        out.extend(lines(&entry.leading, position == 0));
        let width = columns[position];
        let text = match entry.comment {
            Some(_) => format!("{text:width$}"),
            None => text.clone(),
        };
        out.push(commented(text, entry.comment.as_deref()));
    }
    out
}

/// How wide each entry is made before its comment: as wide as the widest commented one among the
/// neighbouring entries of one line.
fn comment_columns(entries: &[Entry], texts: &[String]) -> Vec<usize> {
    let mut columns = vec![0; entries.len()];
    let mut start = 0;
    for position in 0..entries.len() {
        if !entries[position].leading.is_empty() || texts[position].contains('\n') {
            start = position;
        }
        if texts[position].contains('\n') {
            start = position + 1;
        } else if entries[position].comment.is_some() {
            let own = texts[position].chars().count();
            let widest = columns[start..position]
                .iter()
                .copied()
                .fold(own, usize::max);
            columns[start..=position].fill(widest);
        }
    }
    columns
}

fn commented(line: String, comment: Option<&str>) -> String {
    match comment {
        Some(comment) => format!("{line}  {comment}"),
        None => line,
    }
}

/// Comments and blank lines; without the blank line before them at the head of a table.
fn lines(trivia: &[Trivia], head: bool) -> Vec<String> {
    trivia
        .iter()
        .skip_while(|line| head && **line == Trivia::Blank)
        .map(|line| match line {
            Trivia::Blank => String::new(),
            Trivia::Comment(text) => text.clone(),
        })
        .collect()
}

/// Comments, without the blank lines at either end.
fn trimmed(trivia: &[Trivia]) -> Vec<String> {
    let end = trivia.iter().rposition(|line| *line != Trivia::Blank);
    lines(&trivia[..end.map_or(0, |at| at + 1)], true)
}
