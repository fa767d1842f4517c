//! What the author declared, as the dossier shows it: parameters, assumptions, correlations, readouts.

use std::collections::BTreeMap;

use super::document::{Align, Equation, Inline, Table, Term, code, words};
use super::number::significant;
use super::{Derivation, Document};
use crate::model::{AtEdge, Model};
use crate::symbolic::{Interval, Pool};

/// `(0, inf)`, `[a, b)`.
pub(super) fn interval(pool: &Pool, interval: &Interval) -> String {
    interval.notation(|end| pool.format(end))
}

/// Parameters, assumptions and noise.
pub(super) fn declared(document: &mut Document, model: &Model) {
    document.section("What the author declared");
    parameters(document, model);
    noise(document, model);
    if !model.assumptions.is_empty() {
        document.paragraph(words(
            "Assumptions, used in the analysis and checked before every run:",
        ));
        document.list(
            model
                .assumptions
                .iter()
                .map(|a| {
                    vec![
                        Inline::Code(a.name.clone()),
                        Inline::Words(": ".into()),
                        Inline::Code(a.text.clone()),
                    ]
                })
                .collect(),
        );
    }
    edges(document, model);
}

fn parameters(document: &mut Document, model: &Model) {
    let mut table = Table::new([
        ("parameter", Align::Left),
        ("default", Align::Right),
        ("range", Align::Left),
        ("unit", Align::Left),
        ("meaning", Align::Left),
    ]);
    for p in &model.parameters {
        let value = match &p.value {
            Some(value) => {
                let number = model
                    .pool
                    .eval_f64(model.pool.number(value.clone()), &BTreeMap::new());
                significant(number.unwrap_or(f64::NAN), 12)
            }
            None => "to be given".to_owned(),
        };
        table.row([
            code(&p.name),
            words(value),
            words(interval(&model.pool, &p.range)),
            words(p.unit.clone().unwrap_or_default()),
            words(p.about.clone().unwrap_or_default()),
        ]);
    }
    document.table(table);
}

fn noise(document: &mut Document, model: &Model) {
    let names: Vec<&str> = model.drivers.iter().map(|d| d.name.as_str()).collect();
    let text = match names.len() {
        0 => "No Brownian motion drives the model.".to_owned(),
        1 => format!("One Brownian motion drives the model: {}.", names[0]),
        _ if model.declared_correlations.is_empty() => {
            format!(
                "Independent Brownian motions drive the model: {}.",
                names.join(", ")
            )
        }
        _ => format!(
            "Brownian motions drive the model: {}. Pairs not named below are independent.",
            names.join(", ")
        ),
    };
    document.paragraph(words(text));
    document.equations(
        model
            .declared_correlations
            .iter()
            .map(|(i, j, formula)| {
                let left = format!("d<{}, {}>/dt", names[*i], names[*j]);
                Equation::new(vec![Term::Name(left)], vec![Term::Formula(formula.expr)])
            })
            .collect(),
    );
}

fn edges(document: &mut Document, model: &Model) {
    let mut items = Vec::new();
    for state in &model.states {
        for (edge, end) in [(state.at_lower, "lower"), (state.at_upper, "upper")] {
            let does = match edge {
                Some(AtEdge::Absorb) => "is absorbed",
                Some(AtEdge::Reflect) => "is reflected",
                Some(AtEdge::AsEquation) => "does what its equation says",
                None => continue,
            };
            items.push(vec![
                Inline::Words(format!("At the {end} end of its domain ")),
                Inline::Code(state.name.clone()),
                Inline::Words(format!(" {does}.")),
            ]);
        }
    }
    document.list(items);
}

/// The readouts: observed, but without dynamics of their own.
pub(super) fn readouts(document: &mut Document, derivation: &Derivation<'_>) {
    let model = derivation.model;
    if model.readouts.is_empty() {
        return;
    }
    document.section("Readouts");
    document.paragraph(words(
        "Observed along the paths; Ito's rule is not applied to them.",
    ));
    let lines = model.readouts.iter().map(|r| {
        let line = Equation::new(
            vec![Term::Name(r.name.clone())],
            vec![Term::Formula(r.formula.expr)],
        );
        line.remark(r.about.clone().unwrap_or_default())
    });
    document.equations(lines.collect());
}
