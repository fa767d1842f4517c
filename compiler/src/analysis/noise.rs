//! The noise of a single state: constant in a coordinate, or why in none.

use super::coordinate::Candidate;
use super::dependence::mentioned;
use super::free::{Freedom, free_of, kink_in};
use crate::model::Model;
use crate::symbolic::{Bound, Expr, Pool, Symbol};

/// The coefficients of the drivers in a coordinate, if they are free of all states.
pub(super) fn constant_noise(
    pool: &Pool,
    noise: &[Expr],
    coordinate: &Candidate,
    state: Symbol,
    states: &[Symbol],
) -> Option<Vec<Expr>> {
    let slope = pool.derivative(coordinate.forward, state);
    let constant = |&b: &Expr| {
        if pool.is_zero_literal(b) {
            return Some(b);
        }
        match free_of(pool, pool.mul(b, slope), states) {
            Freedom::Free(c) if kink_in(pool, b, states).is_none() => Some(c),
            _ => None,
        }
    };
    noise.iter().map(constant).collect()
}

/// Why no coordinate makes the noise of a state constant, and what the author can do.
pub(super) fn why_no_coordinate(model: &Model, state: usize, noise: &[Expr]) -> String {
    let (pool, declared) = (&model.pool, &model.states[state]);
    if let Some(through) = &declared.through {
        return format!(
            "in the coordinate {} the noise still depends on the states",
            pool.format(through.expr)
        );
    }
    let others = noise.iter().flat_map(|&b| mentioned(model, b));
    if let Some(other) = others.filter(|&j| j != state).min() {
        return format!(
            "its noise depends on {}, so that no coordinate of {} alone makes it constant",
            model.states[other].name, declared.name
        );
    }
    let own = noise.iter().copied().find(|&b| !pool.is_zero_literal(b));
    if let Some(reason) = own.and_then(|b| beyond_domain(model, state, b)) {
        return reason;
    }
    format!(
        "no known coordinate takes the domain of {} onto the whole line and makes its noise constant",
        declared.name
    )
}

/// Noise that a coordinate would make constant, were it not for the declared domain.
fn beyond_domain(model: &Model, state: usize, b: Expr) -> Option<String> {
    let (pool, declared) = (&model.pool, &model.states[state]);
    let x = declared.symbol;
    let slope = pool.derivative(b, x);
    if let Freedom::Free(slope) = free_of(pool, slope, &[x]) {
        if pool.is_zero_literal(slope) {
            return Some(
                "its noise is constant, yet its domain has an end: a Gaussian variable leaves it"
                    .to_owned(),
            );
        }
        let end = pool.simplify(pool.sub(pool.var(x), pool.div(b, slope)));
        let bounds = [declared.domain.lower, declared.domain.upper];
        let touches = bounds
            .into_iter()
            .any(|bound| matches!(bound, Bound::Open(e) if pool.equal(e, end).is_yes()));
        if !touches {
            let end = pool.format(end);
            return Some(format!(
                "its noise is proportional to its distance from {end}, so that the logarithm of that \
                 distance has constant noise, but its domain does not say that it stays on one side: \
                 declare domain = \"({end}, inf)\" if it does"
            ));
        }
    }
    None
}
