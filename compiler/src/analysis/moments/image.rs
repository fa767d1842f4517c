//! Formulas as monotone functions of the coordinate of one state.

use super::{ImageLaw, Moments};
use crate::analysis::free::{Freedom, free_of};
use crate::symbolic::Expr;

impl Moments {
    /// The state in a formula, if there is exactly one.
    pub(super) fn only_state(&self, formula: Expr) -> Option<usize> {
        let symbols = self.model.pool.symbols_of(formula);
        let mut states = symbols.iter().filter_map(|&s| self.model.state_of(s));
        match (states.next(), states.next()) {
            (Some(only), None) => Some(only),
            _ => None,
        }
    }

    /// A state by itself, or an affine function of its coordinate: the law without its name, and whether it is
    /// the latter.
    pub(super) fn image(
        &self,
        formula: Expr,
        state: usize,
        coordinate: Expr,
    ) -> Option<(ImageLaw, bool)> {
        let pool = &self.model.pool;
        let x = self.model.states[state].symbol;
        let law = |variable, forward, increasing| ImageLaw {
            name: None,
            variable,
            forward,
            increasing,
            state,
        };
        if formula == pool.var(x) {
            let along = pool.sign(pool.simplify(pool.derivative(coordinate, x)));
            return Some((law(x, coordinate, along.is_non_negative()), false));
        }
        let free = |e: Expr| match free_of(pool, e, &[x]) {
            Freedom::Free(value) if !pool.depends_on(value, self.model.time) => Some(value),
            _ => None,
        };
        let slope = pool.derivative(coordinate, x);
        let scale = free(pool.div(pool.derivative(formula, x), slope))?;
        let shift = free(pool.sub(formula, pool.mul(scale, coordinate)))?;
        let sign = pool.sign(scale);
        if !sign.is_non_zero() {
            return None;
        }
        let variable = self.value_symbol();
        let forward = pool.div(pool.sub(pool.var(variable), shift), scale);
        Some((law(variable, forward, sign.is_positive()), true))
    }
}
