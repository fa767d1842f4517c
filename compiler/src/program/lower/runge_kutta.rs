//! The classical fourth-order Runge-Kutta step (Kutta 1901) of states without noise.

use std::collections::BTreeMap;

use super::Lowering;
use crate::program::builder::Phase;
use crate::program::formula::Formulas;
use crate::program::op::ValueId;
use crate::symbolic::{Expr, Symbol};

impl Lowering<'_> {
    /// All states of a group by one step, from four slopes each.
    pub(super) fn runge_kutta(&mut self, drifts: &[(usize, Expr)]) -> Vec<(usize, ValueId)> {
        let start = self.builder.start();
        let length = self.builder.length();
        let half = self.builder.number(0.5);
        let half_length = self.builder.mul(half, length);
        let middle = self.builder.add(start, half_length);
        let end = self.builder.add(start, length);
        let first = self.slopes(drifts, start, None);
        let second = self.slopes(drifts, middle, Some((half_length, &first)));
        let third = self.slopes(drifts, middle, Some((half_length, &second)));
        let fourth = self.slopes(drifts, end, Some((length, &third)));
        let two = self.builder.number(2.0);
        let sixth = self.builder.number(1.0 / 6.0);
        let weight = self.builder.mul(sixth, length);
        let mut next = Vec::new();
        for (place, &(state, drift)) in drifts.iter().enumerate() {
            let ends = self.builder.add(first[place], fourth[place]);
            let inner = self.builder.add(second[place], third[place]);
            let sum = self.builder.mul_add(two, inner, ends);
            let current = self.current(state);
            let value = self.builder.mul_add(weight, sum, current);
            let text = format!(
                "d({}) = ({}) dt, stepped by the classical Runge-Kutta method.",
                self.coordinate_text(state),
                self.model.pool.format(drift)
            );
            self.note(state, value, text);
            next.push((state, value));
        }
        next
    }

    /// The slopes at `time`, where each state has moved along a slope for a while.
    fn slopes(
        &mut self,
        drifts: &[(usize, Expr)],
        time: ValueId,
        moved: Option<(ValueId, &[ValueId])>,
    ) -> Vec<ValueId> {
        let mut coordinates: BTreeMap<Symbol, ValueId> = self.coordinates(Phase::Step);
        if let Some((length, slopes)) = moved {
            for (&(state, _), &slope) in drifts.iter().zip(slopes) {
                let current = self.current(state);
                let value = self.builder.mul_add(length, slope, current);
                coordinates.insert(self.plan.coordinates[state].symbol, value);
            }
        }
        let mut environment = self.step_environment(time, coordinates);
        let mut formulas = Formulas {
            pool: &self.model.pool,
            builder: &mut self.builder,
            environment: &mut environment,
        };
        drifts
            .iter()
            .map(|&(_, drift)| formulas.lower(drift))
            .collect()
    }
}
