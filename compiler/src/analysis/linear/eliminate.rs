//! Elimination: coordinates for all states at once, and the states that none suits.

use std::collections::BTreeMap;

use super::{Row, Rows};
use crate::analysis::coordinate::{Candidate, candidates};
use crate::analysis::dependence::{deterministic, mentioned};
use crate::analysis::noise::{constant_noise, why_no_coordinate};
use crate::calculus::{Dynamics, Process, expand};
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Symbol};

/// What is known of a state while the system is being found.
pub(super) struct Entry {
    /// Candidates that make the noise constant, with that noise, the best first; or why there is none.
    pub(super) options: Result<Vec<Choice>, String>,
    /// The candidate in use.
    pub(super) active: usize,
}

/// A candidate with its Ito expansion.
pub(super) struct Choice {
    pub(super) coordinate: Candidate,
    pub(super) process: Process,
    pub(super) noise: Vec<Expr>,
    pub(super) trace: Trace,
}

pub(super) struct Finder<'a> {
    pub(super) model: &'a Model,
    pub(super) symbols: Vec<Symbol>,
    pub(super) entries: Vec<Entry>,
}

impl<'a> Finder<'a> {
    pub(super) fn new(
        model: &'a Model,
        dynamics: &Dynamics,
        excluded: &BTreeMap<usize, String>,
    ) -> Self {
        let calm = deterministic(model, dynamics);
        let symbols: Vec<Symbol> = model.states.iter().map(|s| s.symbol).collect();
        let entry = |i: usize| {
            let options = match excluded.get(&i) {
                Some(reason) => Err(reason.clone()),
                None => options(model, dynamics, &symbols, i, calm[i]),
            };
            Entry { options, active: 0 }
        };
        let entries = (0..model.states.len()).map(entry).collect();
        Self {
            model,
            symbols,
            entries,
        }
    }

    pub(super) fn exclude(&mut self, state: usize, reason: String) {
        self.entries[state].options = Err(reason);
    }

    pub(super) fn choice(&self, state: usize) -> Option<&Choice> {
        let entry = &self.entries[state];
        entry
            .options
            .as_ref()
            .ok()
            .map(|options| &options[entry.active])
    }

    /// Eliminates until every state left has a row.
    pub(super) fn settle(&mut self) -> Rows {
        // Each round fixes a coordinate or drops a state; the bound only guards against states that
        // keep changing each other's coordinates.
        for _ in 0..3 * self.entries.len() + 2 {
            let before: Vec<usize> = self.entries.iter().map(|e| e.active).collect();
            let rows: Rows = (0..self.entries.len())
                .map(|i| self.row_or_switch(i))
                .collect();
            let switched = self
                .entries
                .iter()
                .zip(&before)
                .any(|(e, &active)| e.active != active);
            if !switched && !self.drop_failures(&rows) {
                return rows;
            }
        }
        let reason = "no choice of coordinates was found that suits all states at once";
        self.entries
            .iter()
            .map(|_| Err(reason.to_owned()))
            .collect()
    }

    fn drop_failures(&mut self, rows: &Rows) -> bool {
        let mut dropped = false;
        for (entry, row) in self.entries.iter_mut().zip(rows) {
            if let (Err(reason), Ok(_)) = (row, &entry.options) {
                entry.options = Err(reason.clone());
                dropped = true;
            }
        }
        dropped
    }

    /// The row of a state in the first of its coordinates that gives one, the active one before others.
    fn row_or_switch(&mut self, state: usize) -> Result<Row, String> {
        let count = self.entries[state].options.as_ref().map_or(0, Vec::len);
        let first = self.row(state);
        if first.is_ok() {
            return first;
        }
        let before = self.entries[state].active;
        for other in (0..count).filter(|&k| k != before) {
            self.entries[state].active = other;
            let row = self.row(state);
            if row.is_ok() {
                return row;
            }
        }
        self.entries[state].active = before;
        first
    }
}

/// The coordinates of a state that make its noise constant; `calm`: nothing random reaches the state.
fn options(
    model: &Model,
    dynamics: &Dynamics,
    symbols: &[Symbol],
    state: usize,
    calm: bool,
) -> Result<Vec<Choice>, String> {
    let declared = &model.states[state];
    let noise = &dynamics.states[state].diffusion;
    let pool = &model.pool;
    let of_itself = |b: Expr| mentioned(model, b).into_iter().all(|j| j == state);
    let own = noise
        .iter()
        .copied()
        .find(|&b| !pool.is_zero_literal(b) && of_itself(b));
    let mut found = candidates(model, declared, own);
    if calm {
        // Nothing random reaches it, so it need not live on the whole line: itself first.
        found.sort_by_key(|c| !c.is_identity());
    }
    let choices: Vec<Choice> = found
        .into_iter()
        .filter_map(|coordinate| {
            let noise = constant_noise(pool, noise, &coordinate, declared.symbol, symbols)?;
            let expansion = expand(model, &dynamics.states, coordinate.forward);
            let process = Process {
                drift: expansion.drift,
                diffusion: expansion.diffusion,
            };
            Some(Choice {
                coordinate,
                process,
                noise,
                trace: expansion.trace,
            })
        })
        .collect();
    if choices.is_empty() {
        Err(why_no_coordinate(model, state, noise))
    } else {
        Ok(choices)
    }
}
