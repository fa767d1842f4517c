//! Equations: left sides, relations and right sides in columns, remarks beside or below.

use super::pieces;
use crate::report::document::{Equation, Math, Term};
use crate::report::math::{Notation, escape_html as escape, mathml, row};
use crate::symbolic::Pool;

/// The step that this whole program is about: it is set apart.
const CORRECTION: &str = "Ito correction";

/// A block of equations.
pub(super) fn html(pool: &Pool, list: &[Equation]) -> String {
    let lines: String = list.iter().map(|equation| line(pool, equation)).collect();
    format!("<div class=\"equations\">\n{lines}</div>\n")
}

fn line(pool: &Pool, equation: &Equation) -> String {
    let class = if is_correction(&equation.left) {
        "equation correction"
    } else {
        "equation"
    };
    let left = row(pool, &equation.left);
    let right = row(pool, &equation.right);
    let relation = if equation.relation.is_empty() {
        String::new()
    } else {
        format!("<math><mo>{}</mo></math> ", escape(equation.relation))
    };
    let mut out = format!(
        "<div class=\"{class}\"><div class=\"left\">{}</div><div class=\"right\">{relation}{}",
        pieces(&left, true),
        pieces(&right, true)
    );
    for (name, part) in &right.parts {
        let name = mathml(&Notation::Name(name.clone()));
        out.push_str(&format!(
            "<div class=\"part\"><math displaystyle=\"true\">{name}<mo>=</mo>{}</math></div>",
            mathml(part)
        ));
    }
    out.push_str("</div>");
    if !equation.remark.is_empty() {
        out.push_str(&format!(
            "<div class=\"remark\">{}</div>",
            escape(&equation.remark)
        ));
    }
    out + "</div>\n"
}

fn is_correction(left: &Math) -> bool {
    matches!(left.as_slice(), [Term::Symbol(text)] if text == CORRECTION)
}
