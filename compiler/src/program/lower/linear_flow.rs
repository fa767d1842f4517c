//! Exact steps of commuting linear flows: a map of the drivers' increments.

use std::collections::BTreeMap;

use super::Lowering;
use super::noise::Noise;
use crate::analysis::linear_flow::LinearFlow;
use crate::program::op::ValueId;

impl Lowering<'_> {
    /// Both states after a step.
    pub(super) fn linear_flow_states(
        &mut self,
        flow: &LinearFlow,
        noise: &Noise,
        next: &mut BTreeMap<usize, ValueId>,
    ) {
        for &(driver, symbol) in &flow.increments {
            let increment = self.increment(driver, noise);
            self.step.bind(symbol, increment);
        }
        for (&state, &map) in flow.states.iter().zip(&flow.next) {
            let value = self.in_step(map);
            let text = self.equation_text(state, "moved by its exact flow");
            self.note(state, value, text);
            next.insert(state, value);
        }
    }
}
