//! The LaTeX writer: an article that a plain TeX installation compiles (amsmath, geometry, longtable).

use super::document::{Align, Block, Diagram, Document, Equation, Inline, Mark, Table};
use super::math::{Notation, Row, escape_latex as escape, latex, row, written};
use crate::symbolic::Pool;

/// Letters that fit on a line of mathematics beside its left side.
const LINE: usize = 46;

const PREAMBLE: &str = r"\documentclass[11pt,a4paper]{article}
\usepackage[utf8]{inputenc}
\usepackage[T1]{fontenc}
\usepackage{amsmath}
\usepackage{longtable}
\usepackage[margin=25mm]{geometry}
\setlength{\parindent}{0pt}
\setlength{\parskip}{6pt}
\allowdisplaybreaks
\raggedright
";

/// Writes a document as LaTeX.
pub fn write(document: &Document) -> String {
    let pool = &document.pool;
    let mut out = format!(
        "{PREAMBLE}\\title{{{}}}\n\\author{{{}}}\n\\date{{}}\n\\begin{{document}}\n\\maketitle\n",
        escape(&document.title),
        escape(&document.subtitle)
    );
    for block in &document.blocks {
        match block {
            Block::Heading { level: 1, text } => {
                out.push_str(&format!("\n\\section*{{{}}}\n", inline(pool, text)));
            }
            Block::Heading { text, .. } => {
                out.push_str(&format!("\n\\subsection*{{{}}}\n", inline(pool, text)));
            }
            Block::Paragraph(text) => out.push_str(&format!("\n{}\n", inline(pool, text))),
            Block::List(items) => {
                let items: Vec<String> = items.iter().map(|item| inline(pool, item)).collect();
                out.push_str(&itemize(&items));
            }
            Block::Equations(list) => out.push_str(&equations(pool, list)),
            Block::Table(rows) => out.push_str(&table(pool, rows)),
            Block::Scores(scores) => out.push_str(&format!("\n{}\n", escape(&scores.in_words()))),
            Block::Diagram(diagram) => out.push_str(&influences(diagram)),
        }
    }
    out + "\\end{document}\n"
}

fn itemize(items: &[String]) -> String {
    let items: String = items.iter().map(|i| format!("\\item {i}\n")).collect();
    format!("\\begin{{itemize}}\n{items}\\end{{itemize}}\n")
}

fn influences(diagram: &Diagram) -> String {
    let lines: Vec<String> = diagram.lines().iter().map(|line| escape(line)).collect();
    itemize(&lines)
}

/// Aligned at their relations; long sums go on below. Remarks stand at the right where there is room.
fn equations(pool: &Pool, list: &[Equation]) -> String {
    let lines: Vec<String> = list.iter().flat_map(|e| lines(pool, e)).collect();
    format!(
        "\\begin{{align*}}\n{}\n\\end{{align*}}\n",
        lines.join(" \\\\\n")
    )
}

fn lines(pool: &Pool, equation: &Equation) -> Vec<String> {
    let left = row(pool, &equation.left);
    let right = row(pool, &equation.right);
    let set = |pieces: &[Notation]| pieces.iter().map(latex).collect::<String>();
    let mut lines = Vec::new();
    let (mut line, mut width) = (String::new(), left.width());
    for piece in right.broken(LINE) {
        if width + piece.width() > LINE && !line.is_empty() {
            lines.push(std::mem::take(&mut line));
            width = left.width();
        }
        width += piece.width();
        line.push_str(&latex(&piece));
    }
    lines.push(line);
    let first = format!("{} &{} ", set(&left.pieces), equation.relation);
    let mut lines: Vec<String> = lines
        .into_iter()
        .enumerate()
        .map(|(i, line)| match i {
            0 => format!("{first}{line}"),
            _ => format!("&\\quad {line}"),
        })
        .collect();
    for (name, part) in &right.parts {
        let name = latex(&Notation::Name(name.clone()));
        lines.push(format!("&\\quad {name} = {}", latex(part)));
    }
    remark(&mut lines, &equation.remark, width);
    lines
}

/// Beside the last line, or below it.
fn remark(lines: &mut Vec<String>, remark: &str, width: usize) {
    if remark.is_empty() {
        return;
    }
    let words = format!("\\small\\itshape {}", escape(remark));
    let last = lines.last_mut().expect("a line");
    if width + remark.chars().count() <= LINE {
        last.push_str(&format!("\\qquad\\text{{{words}}}"));
    } else {
        lines.push(format!("&\\quad\\parbox[t]{{0.6\\linewidth}}{{{words}}}"));
    }
}

fn table(pool: &Pool, table: &Table) -> String {
    // The last column takes words, and breaks.
    let columns: Vec<&str> = table
        .columns
        .iter()
        .enumerate()
        .map(|(i, c)| match c.align {
            Align::Right => "r",
            Align::Left if i + 1 == table.columns.len() => "p{0.36\\linewidth}",
            Align::Left => "l",
        })
        .collect();
    let heads: Vec<String> = table
        .columns
        .iter()
        .map(|c| format!("\\textbf{{{}}}", escape(&c.title)))
        .collect();
    let mut out = format!(
        "\n{{\\small\n\\begin{{longtable}}[l]{{@{{}}{}@{{}}}}\n{} \\\\ \\hline\n\\endhead\n",
        columns.concat(),
        heads.join(" & ")
    );
    for cells in &table.rows {
        let cells: Vec<String> = cells.iter().map(|cell| inline(pool, cell)).collect();
        out.push_str(&format!("{} \\\\\n", cells.join(" & ")));
    }
    out + "\\end{longtable}\n}\n"
}

fn inline(pool: &Pool, parts: &[Inline]) -> String {
    let one = |part: &Inline| match part {
        Inline::Words(words) => escape(words),
        Inline::Marked(Mark::Open, words) => format!("\\textit{{{}}}", escape(words)),
        Inline::Marked(_, words) => format!("\\textbf{{{}}}", escape(words)),
        Inline::Code(text) => format!("\\texttt{{{}}}", escape(text)),
        Inline::Formula(e) => math(&Notation::of(pool, *e)),
        Inline::Written(text) => math(&written(pool, text)),
        Inline::Math(terms) => math(&row(pool, terms)),
    };
    parts.iter().map(one).collect()
}

/// A row of mathematics within running text; its named parts follow it.
fn math(row: &Row) -> String {
    let pieces = row.broken(LINE).into_iter().map(|piece| match piece {
        // Signs keep their distance where a line may be broken behind them.
        Notation::Sign(_) => format!("${{}}{}{{}}$", latex(&piece)),
        _ => format!("${}$", latex(&piece)),
    });
    let mut out = pieces.collect::<Vec<_>>().join("\\allowbreak{}");
    for (i, (name, part)) in row.parts.iter().enumerate() {
        let lead = if i == 0 { " where " } else { "; " };
        let name = latex(&Notation::Name(name.clone()));
        out.push_str(&format!("{lead}${name} = {}$", latex(part)));
    }
    out
}
