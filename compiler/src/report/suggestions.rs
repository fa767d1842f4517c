//! What the author could write instead.

use super::document::{Inline, Text};
use super::{Derivation, Document, method_line};
use crate::pipeline::Suggestion;
use crate::symbolic::{Expr, Pool};

/// The section on suggestions.
pub(super) fn suggestions(document: &mut Document, derivation: &Derivation<'_>) {
    if derivation.suggestions.is_empty() {
        return;
    }
    document.section("Suggestions");
    document.list(derivation.suggestions.iter().map(line).collect());
}

/// What to write and to leave out, what it gives, and the equation in the new coordinate.
fn line(suggestion: &Suggestion) -> Text {
    let (model, group) = (&suggestion.model, suggestion.group());
    let code = |text: String| Inline::Code(text);
    let words = |text: &str| Inline::Words(text.to_owned());
    let mut text = vec![
        code(model.states[suggestion.state].name.clone()),
        words(": "),
    ];
    let write = suggestion.write.iter();
    let mut parts: Vec<Text> = write
        .map(|(key, value)| vec![words("write "), code(format!("{key} = \"{value}\""))])
        .collect();
    let left_out = suggestion.leave_out.iter();
    parts.extend(left_out.map(|key| vec![words("leave out "), code((*key).to_owned())]));
    for (i, part) in parts.into_iter().enumerate() {
        if i > 0 {
            text.push(words(", "));
        }
        text.extend(part);
    }
    let given = method_line(model, &suggestion.plan, group);
    text.push(Inline::Words(format!("; then {given}")));
    if group.preserves_domain {
        text.push(words(", and every step stays in the domain"));
    }
    text.push(words(". "));
    text.push(code(equation(suggestion)));
    text
}

/// `d(log(S)) = (mu - sigma^2/2) dt + (sigma) dW`
fn equation(suggestion: &Suggestion) -> String {
    let model = &suggestion.model;
    let pool: &Pool = &model.pool;
    let (coordinate, process) = suggestion.coordinate();
    let term = |e: Expr, of: &str| format!("({}) d{of}", pool.format(e));
    let noise = model.drivers.iter().zip(&process.diffusion);
    let parts = std::iter::once(("t", process.drift))
        .chain(noise.map(|(driver, &b)| (driver.name.as_str(), b)));
    let terms: Vec<String> = parts
        .filter(|&(_, e)| !pool.is_zero_literal(e))
        .map(|(of, e)| term(e, of))
        .collect();
    format!("d({}) = {}", pool.format(coordinate), terms.join(" + "))
}
