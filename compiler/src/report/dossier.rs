//! The dossier: the derivation a reviewer reads from top to bottom.

use super::document::{Inline, Mark, prose, words};
use super::{
    Derivation, Document, claims, dynamics, facts, influences, methods, statement, suggestions,
};
use crate::calculus::Expansion;
use crate::model::{Calculus, Model};

/// The whole derivation of a model.
pub fn dossier(derivation: &Derivation<'_>) -> Document {
    let model = derivation.model;
    let mut document = Document::new(&model.pool, title(model), subtitle(model));
    if let Some(about) = &model.about {
        document.paragraph(prose(about.trim()));
    }
    statement::declared(&mut document, model);
    influences::influences(&mut document, derivation);
    dynamics::states(&mut document, derivation);
    dynamics::derived(&mut document, derivation);
    statement::readouts(&mut document, derivation);
    methods::methods(&mut document, derivation);
    suggestions::suggestions(&mut document, derivation);
    facts::facts(&mut document, derivation);
    claims::claims(&mut document, derivation);
    findings(&mut document, derivation);
    cautions(&mut document, derivation);
    document
}

/// Ito's rule applied to one formula that need not stand in the file.
pub fn on_the_spot(derivation: &Derivation<'_>, expansion: &Expansion) -> Document {
    let model = derivation.model;
    let head = format!("Ito's rule for {}", model.pool.format(expansion.formula));
    let mut document = Document::new(&model.pool, head, subtitle(model));
    document.section("Dynamics of the states");
    document.equations(dynamics::state_equations(
        model,
        &derivation.dynamics.states,
    ));
    document.section("Derivation");
    dynamics::expansion_steps(&mut document, model, "F", expansion);
    document
}

/// The title, or the name where there is none.
fn title(model: &Model) -> String {
    model.title.clone().unwrap_or_else(|| model.name.clone())
}

fn subtitle(model: &Model) -> String {
    let calculus = match model.calculus {
        Calculus::Ito => "Ito calculus",
        Calculus::Stratonovich => "Stratonovich calculus, converted to Ito's",
    };
    let time = model
        .time_unit
        .as_ref()
        .map(|u| format!(", time in {u}s"))
        .unwrap_or_default();
    format!("model {}, {calculus}{time}", model.name)
}

fn findings(document: &mut Document, derivation: &Derivation<'_>) {
    if derivation.diagnostics.is_empty() {
        return;
    }
    document.section("Findings");
    document.list(
        derivation
            .diagnostics
            .iter()
            .map(|d| {
                let mark = if d.is_error() { Mark::Bad } else { Mark::Open };
                let mut text = vec![Inline::Marked(
                    mark,
                    format!("{} {}", d.severity.name(), d.code.id()),
                )];
                text.extend(prose(&format!(": {}", d.message)));
                if let Some(hint) = &d.hint {
                    text.extend(prose(&format!(" ({hint})")));
                }
                text
            })
            .collect(),
    );
}

fn cautions(document: &mut Document, derivation: &Derivation<'_>) {
    document.section("Cautions");
    let mut items = vec![words(
        "The derivation shows that the code follows from the equations. It does not show that the \
         equations describe the world: data, calibration and use remain to be judged.",
    )];
    if derivation.plan.groups.iter().any(|g| !g.is_exact()) {
        items.push(words(
            "Where a scheme is approximate, results depend on the step: halve it until they no longer \
             move by more than you can accept. The orders hold under the regularity stated above.",
        ));
    }
    if !derivation.model.assumptions.is_empty() {
        items.push(words(
            "All of it holds under the assumptions above, and not beyond them.",
        ));
    }
    let exceeded = derivation.model.pool.exceeded().into_iter();
    items.extend(exceeded.map(|limit| words(format!("A budget was exceeded: {limit}."))));
    items.push(words(
        "Use for valuation, risk or capital falls under your firm's model-risk policy and your local \
         rules, and may need the review of a licensed practitioner; this document replaces none of them.",
    ));
    document.list(items);
}
