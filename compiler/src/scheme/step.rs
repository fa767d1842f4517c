//! The coefficients of one-step schemes, in the coordinates.

use std::collections::BTreeMap;

use super::edges::{self, Projection};
use super::{Coordinate, SchemeName, StateStep};
use crate::analysis::commute::{along_noise, relevant_drivers};
use crate::analysis::coordinate::{Candidate, auxiliary, through};
use crate::calculus::{Dynamics, Process, expand};
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Symbol};

/// A state's coordinate with its process.
pub(super) fn coordinate(state: usize, candidate: &Candidate, process: Process) -> Coordinate {
    Coordinate {
        state,
        symbol: candidate.symbol,
        forward: candidate.forward,
        inverse: candidate.inverse,
        identity: candidate.is_identity(),
        process,
    }
}

/// The coordinate a one-step scheme works in: the author's, else the state itself, projected to its
/// domain where its coefficients need that. Also Ito's rule on it, where it was needed.
pub(super) fn step_coordinate(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
) -> (Coordinate, Projection, Trace) {
    let declared = &model.states[state];
    let own = dynamics.states[state].clone();
    if let Some(candidate) = through(model, declared).filter(|c| !c.is_identity()) {
        let expansion = expand(model, &dynamics.states, candidate.forward);
        let process = Process {
            drift: expansion.drift,
            diffusion: expansion.diffusion,
        };
        return (
            coordinate(state, &candidate, process),
            Projection::default(),
            expansion.trace,
        );
    }
    let mut identity = Candidate::identity(&model.pool, declared);
    let projection = edges::projection(model, dynamics, state);
    if !projection.is_none() {
        // The stored value may lie beyond the domain, so that its symbol must not have the state's range.
        identity.symbol = auxiliary(&model.pool, &declared.name);
        identity.inverse = projection.apply(model, model.pool.var(identity.symbol));
    }
    (
        coordinate(state, &identity, own),
        projection,
        Trace::default(),
    )
}

/// Rewrites formulas in the states as formulas in the coordinates.
pub(super) struct Frame<'a> {
    model: &'a Model,
    inverses: BTreeMap<Symbol, Expr>,
}

impl<'a> Frame<'a> {
    pub(super) fn new(model: &'a Model, coordinates: &[Coordinate]) -> Self {
        let moved = coordinates.iter().filter(|c| !c.identity);
        let inverses = moved
            .map(|c| (model.states[c.state].symbol, c.inverse))
            .collect();
        Self { model, inverses }
    }

    /// A formula in the states as one in the coordinates, simplified.
    pub(super) fn write(&self, e: Expr) -> Expr {
        let pool = &self.model.pool;
        pool.simplify(pool.substitute(e, &self.inverses))
    }
}

/// The step of one state: drift and diffusion of its coordinate, and Milstein's terms if asked for.
pub(super) fn state_step(
    model: &Model,
    dynamics: &Dynamics,
    coordinate: &Coordinate,
    frame: &Frame<'_>,
    scheme: SchemeName,
) -> StateStep {
    let state = coordinate.state;
    let candidate = Candidate {
        symbol: coordinate.symbol,
        forward: coordinate.forward,
        inverse: coordinate.inverse,
        onto_line: false,
    };
    let (lower, upper) = edges::rules(model, state, &candidate);
    let process = &coordinate.process;
    StateStep {
        state,
        drift: frame.write(process.drift),
        diffusion: process.diffusion.iter().map(|&b| frame.write(b)).collect(),
        milstein: match scheme {
            SchemeName::Milstein => milstein(model, dynamics, &process.diffusion, frame),
            _ => Vec::new(),
        },
        lower,
        upper,
    }
}

/// The non-zero coefficients of `dW_j dW_k - rho_jk h` for noise that commutes: `L^j b^j / 2` on the
/// diagonal and `L^j b^k`, which stands for both orders, beside it (Kloeden and Platen 1992, section
/// 10.3). Correlated drivers need no other rule: by the product rule `I_(j,k) + I_(k,j) = dW_j dW_k -
/// rho_jk h`.
fn milstein(
    model: &Model,
    dynamics: &Dynamics,
    b: &[Expr],
    frame: &Frame<'_>,
) -> Vec<(usize, usize, Expr)> {
    let pool = &model.pool;
    let drivers = relevant_drivers(model, dynamics, b);
    let mut terms = Vec::new();
    for (position, &j) in drivers.iter().enumerate() {
        for &k in &drivers[position..] {
            let along = along_noise(model, dynamics, j, b[k]);
            let weight = if j == k { pool.ratio(1, 2) } else { pool.one() };
            let coefficient = frame.write(pool.mul(weight, along));
            if !pool.is_zero_literal(coefficient) {
                terms.push((j, k, coefficient));
            }
        }
    }
    terms
}
