//! What drives what: which Brownian motions and states enter the equation of each state, and which states
//! each observed quantity reads.

use super::document::{Diagram, DiagramNode, NodeKind, words};
use super::{Derivation, Document};
use crate::symbolic::{Expr, Symbol};

/// The section with the diagram; none for a model of one state without noise and without quantities.
pub(super) fn influences(document: &mut Document, derivation: &Derivation<'_>) {
    let diagram = diagram(derivation);
    if diagram.arrows.is_empty() {
        return;
    }
    document.section("What drives what");
    document.paragraph(words(
        "An arrow leads to each quantity from what enters its equation or formula.",
    ));
    document.diagram(diagram);
}

fn diagram(derivation: &Derivation<'_>) -> Diagram {
    let (model, dynamics) = (derivation.model, derivation.dynamics);
    let pool = &model.pool;
    let mut diagram = Diagram::default();
    let mut node = |name: &str, kind| {
        let name = name.to_owned();
        diagram.nodes.push(DiagramNode { name, kind });
        diagram.nodes.len() - 1
    };
    let drivers: Vec<usize> = model
        .drivers
        .iter()
        .map(|d| node(&d.name, NodeKind::Driver))
        .collect();
    let states: Vec<(usize, Symbol)> = model
        .states
        .iter()
        .map(|s| (node(&s.name, NodeKind::State), s.symbol))
        .collect();
    let derived = dynamics.derived.iter().map(|d| d.formula);
    let derived = model.derived.iter().map(|d| &d.name).zip(derived);
    let readouts = model.readouts.iter().map(|r| (&r.name, r.formula.expr));
    let observed: Vec<(usize, Expr)> = derived
        .chain(readouts)
        .map(|(name, formula)| (node(name, NodeKind::Observed), formula))
        .collect();
    let reads = |e: Expr| {
        let states = states.iter();
        states.filter(move |(_, symbol)| pool.depends_on(e, *symbol))
    };
    for (&(to, _), process) in states.iter().zip(&dynamics.states) {
        let noise = drivers.iter().zip(&process.diffusion);
        let noise = noise.filter(|(_, b)| !pool.is_zero_literal(**b));
        diagram.arrows.extend(noise.map(|(&from, _)| (from, to)));
        let mut coefficients = vec![process.drift];
        coefficients.extend(&process.diffusion);
        let read: std::collections::BTreeSet<usize> = coefficients
            .into_iter()
            .flat_map(|e| reads(e).map(|&(from, _)| from).collect::<Vec<_>>())
            .filter(|&from| from != to)
            .collect();
        diagram
            .arrows
            .extend(read.into_iter().map(|from| (from, to)));
    }
    for (to, formula) in observed {
        let from = reads(formula).map(|&(from, _)| (from, to));
        diagram.arrows.extend(from.collect::<Vec<_>>());
    }
    diagram
}
