//! The dynamics of states and derived quantities as equations.

use super::document::{Equation, Inline, Math, Term, increments, words};
use super::{Derivation, Document, trace};
use crate::calculus::{Expansion, Process};
use crate::model::{Calculus, Model};
use crate::symbolic::Expr;

fn named<'a>(model: &'a Model, diffusion: &[Expr]) -> Vec<(&'a str, Expr)> {
    model
        .drivers
        .iter()
        .map(|d| d.name.as_str())
        .zip(diffusion.iter().copied())
        .collect()
}

/// `dX = drift dt + ... dW`.
pub(super) fn equation(model: &Model, name: &str, drift: Expr, diffusion: &[Expr]) -> Equation {
    let left = vec![Term::Differential(name.to_owned())];
    Equation::new(
        left,
        increments(&model.pool, drift, named(model, diffusion)),
    )
}

/// The Ito equations of all states.
pub fn state_equations(model: &Model, processes: &[Process]) -> Vec<Equation> {
    model
        .states
        .iter()
        .zip(processes)
        .map(|(state, process)| equation(model, &state.name, process.drift, &process.diffusion))
        .collect()
}

/// One line a derived quantity: its drift with the Ito correction set apart by a brace of words.
pub fn derived_summary(model: &Model, expansions: &[Expansion]) -> Vec<Equation> {
    let pool = &model.pool;
    model
        .derived
        .iter()
        .zip(expansions)
        .map(|(derived, expansion)| {
            let line = equation(model, &derived.name, expansion.drift, &expansion.diffusion);
            let correction = pool.format(expansion.ito_correction);
            line.remark(if correction == "0" {
                format!(
                    "{} = {}; no Ito correction",
                    derived.name, derived.formula.text
                )
            } else {
                format!(
                    "{} = {}; Ito correction {correction}",
                    derived.name, derived.formula.text
                )
            })
        })
        .collect()
}

/// The section on the states.
pub(super) fn states(document: &mut Document, derivation: &Derivation<'_>) {
    let (model, dynamics) = (derivation.model, derivation.dynamics);
    document.section("Dynamics of the states");
    if model.calculus == Calculus::Stratonovich {
        document.paragraph(words(
            "The model is declared in Stratonovich's sense. As declared, with ∘ for his integral:",
        ));
        document.equations(
            model
                .states
                .iter()
                .map(|s| stratonovich(model, s))
                .collect(),
        );
        document.paragraph(words(
            "Converted to Ito's sense: each drift gains half the derivatives of its diffusion along \
             the diffusions, weighted with the drivers' correlations.",
        ));
        for (state, conversion) in model.states.iter().zip(&dynamics.conversion) {
            if !conversion.steps.is_empty() {
                document.part(vec![
                    Inline::Code(state.name.clone()),
                    Inline::Words(", converted".into()),
                ]);
                document.equations(trace::equations(conversion));
            }
        }
        document.paragraph(words("In Ito's sense, which all that follows uses:"));
    }
    document.equations(state_equations(model, &dynamics.states));
    let starts = model.states.iter().map(|s| {
        let left = vec![Term::Name(format!("{}(0)", s.name))];
        let equation = Equation::new(left, vec![Term::Formula(s.initial.expr)]);
        let mut remark = format!("on {}", super::statement::interval(&model.pool, &s.domain));
        if let Some(about) = &s.about {
            remark = format!("{about}, {remark}");
        }
        if let Some(unit) = &s.unit {
            remark = format!("{remark}, in {unit}");
        }
        equation.remark(remark)
    });
    document.equations(starts.collect());
}

fn stratonovich(model: &Model, state: &crate::model::State) -> Equation {
    let mut line = equation(model, &state.name, state.drift.expr, &state.diffusion);
    let mut right = Math::new();
    for term in line.right {
        match term {
            Term::Differential(name) if name != "t" => {
                right.push(Term::Symbol("∘".to_owned()));
                right.push(Term::Differential(name));
            }
            other => right.push(other),
        }
    }
    line.right = right;
    line
}

/// The section on the derived quantities.
pub(super) fn derived(document: &mut Document, derivation: &Derivation<'_>) {
    let (model, dynamics) = (derivation.model, derivation.dynamics);
    if model.derived.is_empty() {
        return;
    }
    document.section("Derived quantities, by Ito's rule");
    document.paragraph(words(
        "For F(t, x): dF = (F_t + sum_i F_i a_i + 1/2 sum_ij F_ij d<x_i, x_j>/dt) dt + sum_i F_i (noise of \
         x_i). The last term of the drift is the Ito correction; it is set apart below.",
    ));
    for (quantity, expansion) in model.derived.iter().zip(&dynamics.derived) {
        let mut head = vec![
            Inline::Code(quantity.name.clone()),
            Inline::Words(" = ".into()),
        ];
        head.push(Inline::Formula(expansion.formula));
        if let Some(about) = &quantity.about {
            head.push(Inline::Words(format!("   ({about})")));
        }
        document.part(head);
        expansion_steps(document, model, &quantity.name, expansion);
    }
}

/// The working of one expansion, and its result.
pub(super) fn expansion_steps(
    document: &mut Document,
    model: &Model,
    name: &str,
    expansion: &Expansion,
) {
    let mut lines = trace::equations(&expansion.trace);
    lines.push(equation(model, name, expansion.drift, &expansion.diffusion).remark("result"));
    document.equations(lines);
}
