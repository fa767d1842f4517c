//! Which states depend on which.

use crate::calculus::Dynamics;
use crate::model::Model;
use crate::symbolic::Expr;

/// The states a formula mentions, by index, ascending.
pub fn mentioned(model: &Model, e: Expr) -> Vec<usize> {
    let symbols = model.pool.symbols_of(e);
    let mut found: Vec<usize> = symbols
        .into_iter()
        .filter_map(|s| model.state_of(s))
        .collect();
    found.sort_unstable();
    found
}

/// The states that the drift or the noise of a state mentions, itself included if they do.
pub fn sources(model: &Model, dynamics: &Dynamics, state: usize) -> Vec<usize> {
    let process = &dynamics.states[state];
    let mut found = mentioned(model, process.drift);
    found.extend(process.diffusion.iter().flat_map(|&b| mentioned(model, b)));
    found.sort_unstable();
    found.dedup();
    found
}

/// Whether a state has no noise of its own.
pub fn is_noise_free(model: &Model, dynamics: &Dynamics, state: usize) -> bool {
    dynamics.states[state]
        .diffusion
        .iter()
        .all(|&b| model.pool.is_zero_literal(b))
}

/// For each state whether nothing random reaches it, directly or through other states.
pub fn deterministic(model: &Model, dynamics: &Dynamics) -> Vec<bool> {
    let count = model.states.len();
    let mut calm: Vec<bool> = (0..count)
        .map(|i| is_noise_free(model, dynamics, i))
        .collect();
    let feeds: Vec<Vec<usize>> = (0..count).map(|i| sources(model, dynamics, i)).collect();
    loop {
        let before = calm.clone();
        for (calm, feeds) in calm.iter_mut().zip(&feeds) {
            *calm &= feeds.iter().all(|&j| before[j]);
        }
        if calm == before {
            return calm;
        }
    }
}
