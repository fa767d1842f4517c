//! Observed quantities: states mapped back from their coordinates, derived quantities, readouts.

use std::collections::BTreeMap;

use super::Lowering;
use crate::model::Named;
use crate::program::{Output, OutputKind};
use crate::symbolic::{Expr, Symbol};

impl Lowering<'_> {
    /// The outputs in file order: states, derived quantities, readouts.
    pub(super) fn outputs(&mut self) -> Vec<Output> {
        let model = self.model;
        let mut outputs = Vec::new();
        for (state, coordinate) in model.states.iter().zip(&self.plan.coordinates) {
            let value = self.in_observation(coordinate.inverse);
            outputs.push(Output {
                name: state.name.clone(),
                kind: OutputKind::State,
                formula: None,
                unit: state.unit.clone(),
                about: state.about.clone(),
                value,
            });
        }
        let back = self.inverses();
        outputs.extend(
            model
                .derived
                .iter()
                .map(|named| self.named(named, OutputKind::Derived, &back)),
        );
        outputs.extend(
            model
                .readouts
                .iter()
                .map(|named| self.named(named, OutputKind::Readout, &back)),
        );
        outputs
    }

    /// Each state in its coordinate. Put into formulas before lowering, so that what the two maps cancel
    /// (the logarithm of an exponential) is never computed.
    fn inverses(&self) -> BTreeMap<Symbol, Expr> {
        self.plan
            .coordinates
            .iter()
            .filter(|c| !c.identity)
            .map(|c| (self.model.states[c.state].symbol, c.inverse))
            .collect()
    }

    fn named(&mut self, named: &Named, kind: OutputKind, back: &BTreeMap<Symbol, Expr>) -> Output {
        let formula = self.model.pool.substitute(named.formula.expr, back);
        Output {
            name: named.name.clone(),
            kind,
            formula: Some(named.formula.text.clone()),
            unit: named.unit.clone(),
            about: named.about.clone(),
            value: self.in_observation(formula),
        }
    }
}
