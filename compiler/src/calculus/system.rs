//! A system of processes in some coordinates, on which the generator acts.

use std::borrow::Cow;

use super::{Dynamics, Process};
use crate::model::Model;
use crate::symbolic::{Expr, Pool, Symbol};

/// Coordinates with their processes under the model's correlated drivers: the states themselves or
/// functions of them.
#[derive(Clone)]
pub struct System<'a> {
    /// The model; it lends the pool, the time, the drivers and their correlation.
    pub model: &'a Model,
    /// The coordinates' symbols.
    pub symbols: Vec<Symbol>,
    /// Their Ito processes, in these symbols, time and parameters.
    pub processes: Cow<'a, [Process]>,
}

impl<'a> System<'a> {
    /// The model's states as they were declared.
    pub fn of_states(model: &'a Model, states: &'a [Process]) -> Self {
        let symbols = model.states.iter().map(|s| s.symbol).collect();
        Self {
            model,
            symbols,
            processes: Cow::Borrowed(states),
        }
    }

    /// The model's states with their Ito dynamics.
    pub fn of(model: &'a Model, dynamics: &'a Dynamics) -> Self {
        Self::of_states(model, &dynamics.states)
    }

    /// The pool of the model's formulas.
    pub fn pool(&self) -> &'a Pool {
        &self.model.pool
    }

    /// The position of a coordinate's symbol.
    pub fn position(&self, symbol: Symbol) -> Option<usize> {
        self.symbols.iter().position(|&s| s == symbol)
    }

    /// The coordinates that occur in a formula, ascending.
    pub fn occurring(&self, formula: Expr) -> Vec<usize> {
        let symbols = self.pool().symbols_of(formula);
        let mut found: Vec<usize> = symbols.iter().filter_map(|&s| self.position(s)).collect();
        found.sort_unstable();
        found
    }

    /// The coordinates that occur in the formulas, and those that drive them, and so on; ascending.
    pub fn closure(&self, formulas: impl IntoIterator<Item = Expr>) -> Vec<usize> {
        let mut reached = vec![false; self.symbols.len()];
        let mut pending: Vec<usize> = formulas
            .into_iter()
            .flat_map(|f| self.occurring(f))
            .collect();
        while let Some(i) = pending.pop() {
            if !std::mem::replace(&mut reached[i], true) {
                let process = &self.processes[i];
                pending.extend(self.occurring(process.drift));
                pending.extend(process.diffusion.iter().flat_map(|&b| self.occurring(b)));
            }
        }
        (0..reached.len()).filter(|&i| reached[i]).collect()
    }
}
