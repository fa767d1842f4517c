//! Mathematics and running text as plain characters, for the writers that have only those.

use super::document::{Inline, Term};
use crate::symbolic::{Node, Pool};

/// Mathematics in one line: `dS = mu*S dt + sigma*S dW`.
pub(super) fn math(pool: &Pool, terms: &[Term]) -> String {
    let mut line = String::new();
    for term in terms {
        let piece = match term {
            Term::Formula(expr) => pool.format(*expr),
            Term::Factor(expr) => {
                let text = pool.format(*expr);
                if matches!(*pool.node(*expr), Node::Sum(_)) {
                    format!("({text})")
                } else {
                    text
                }
            }
            Term::Differential(name) => format!("d{name}"),
            Term::Name(name) | Term::Symbol(name) => name.clone(),
        };
        push(&mut line, &piece);
    }
    line
}

/// Appends with a space between; `+` before a minus sign becomes ` - `.
fn push(line: &mut String, piece: &str) {
    if let (Some(rest), Some(head)) = (piece.strip_prefix('-'), line.strip_suffix('+')) {
        let head = head.len();
        line.truncate(head);
        line.push_str("- ");
        line.push_str(rest);
        return;
    }
    if !line.is_empty() && !line.ends_with('(') && !piece.starts_with([')', ',']) {
        line.push(' ');
    }
    line.push_str(piece);
}

/// Running text without marks.
pub(super) fn text(pool: &Pool, parts: &[Inline]) -> String {
    parts
        .iter()
        .map(|part| match part {
            Inline::Words(words)
            | Inline::Marked(_, words)
            | Inline::Code(words)
            | Inline::Written(words) => words.clone(),
            Inline::Formula(expr) => pool.format(*expr),
            Inline::Math(terms) => math(pool, terms),
        })
        .collect()
}
