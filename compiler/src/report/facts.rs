//! Facts and the conditions on which they hang.

use super::document::{Inline, Mark, Text, code, prose, words};
use super::{Derivation, Document};
use crate::analysis::condition::{self, Standing, all_standing};
use crate::analysis::facts::Fact;
use crate::model::Model;

/// The section on facts.
pub(super) fn facts(document: &mut Document, derivation: &Derivation<'_>) {
    let (model, facts) = (derivation.model, derivation.facts);
    if facts.is_empty() {
        return;
    }
    document.section("Facts");
    document.list(facts.iter().map(|fact| line(model, fact)).collect());
    if facts.iter().any(|f| f.condition_text(model).is_some()) {
        document.paragraph(words(
            "Implied, contradicted, open: so ranges and assumptions leave a condition. What is open is checked at the \
             parameter values of each run.",
        ));
    }
}

/// The standing, the statement with its condition, and what is behind it.
fn line(model: &Model, fact: &Fact) -> Text {
    let condition = fact.condition_text(model);
    let standing = match (&condition, fact.standing) {
        (None, Standing::Implied) => "holds",
        (None, Standing::Contradicted) => "does not hold",
        (_, standing) => standing.name(),
    };
    let mark = match fact.standing {
        Standing::Implied => Mark::Good,
        Standing::Contradicted => Mark::Strong,
        Standing::Open => Mark::Open,
    };
    let mut text = vec![
        Inline::Marked(mark, standing.to_owned()),
        Inline::Words(format!(": {}", fact.statement)),
    ];
    if let Some(condition) = condition {
        text.push(Inline::Words(" if and only if ".to_owned()));
        text.extend(code(condition));
    }
    let classes = classes(model, fact);
    let classes = if classes.is_empty() {
        String::new()
    } else {
        format!(": {classes}")
    };
    text.extend(prose(&format!(" ({}{classes})", fact.because)));
    text
}

/// The classes an end may have, those that ranges and assumptions exclude left out.
fn classes(model: &Model, fact: &Fact) -> String {
    let possible = fact
        .classes
        .iter()
        .filter(|(_, when)| all_standing(model, when) != Standing::Contradicted);
    let spoken = possible.map(|(class, when)| {
        let open = when
            .iter()
            .copied()
            .filter(|c| c.standing(model) != Standing::Implied);
        let open: Vec<_> = open.collect();
        match open.is_empty() {
            true => (*class).to_owned(),
            false => format!(
                "{class} where `{}`",
                condition::format(&model.pool, &[open])
            ),
        }
    });
    spoken.collect::<Vec<_>>().join("; ")
}
