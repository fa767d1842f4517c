//! The rules of closed ends: which of them ever act on a state that nothing random reaches.
//!
//! Such a state follows an ordinary differential equation. A solution of the equation is the state's
//! path as long as no rule of an end changes it.

use super::assume;
use super::asymptotics::Side;
use super::boundary::{End, classify};
use crate::calculus::Dynamics;
use crate::model::{AtEdge, Model};
use crate::symbolic::{Bound, Expr};

/// A closed end that absorbs or reflects.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Ruled {
    /// The end, in the parameters.
    pub end: Expr,
    /// Which end.
    pub side: Side,
    /// Whether it absorbs; else it reflects.
    pub absorbs: bool,
}

/// The ends of a state's domain that absorb or reflect.
pub fn ruled(model: &Model, state: usize) -> impl Iterator<Item = Ruled> {
    let declared = &model.states[state];
    let ends = [
        (Side::Lower, declared.domain.lower, declared.at_lower),
        (Side::Upper, declared.domain.upper, declared.at_upper),
    ];
    ends.into_iter().filter_map(|(side, bound, rule)| {
        let Bound::Closed(end) = bound else {
            return None;
        };
        let absorbs = match rule? {
            AtEdge::Absorb => true,
            AtEdge::Reflect => false,
            AtEdge::AsEquation => return None,
        };
        Some(Ruled { end, side, absorbs })
    })
}

/// The first rule that may act on a state that nothing random reaches: one at an end that is not proved
/// to be out of reach, and one that absorbs where the state may start at the end and the equation
/// would lead it away.
pub fn acting(model: &Model, dynamics: &Dynamics, state: usize) -> Option<Ruled> {
    ruled(model, state).find(|rule| {
        classify(model, dynamics, state, rule.side) != End::NotReached
            || (rule.absorbs
                && !starts_off(model, state, rule.side, rule.end)
                && !rests_at(model, dynamics, state, rule))
    })
}

/// Whether a state starts away from an end of its domain, whatever the parameters.
pub fn starts_off(model: &Model, state: usize, side: Side, end: Expr) -> bool {
    let pool = &model.pool;
    let away = pool.simplify(pool.sub(model.states[state].initial.expr, end));
    let inward = match side {
        Side::Lower => away,
        Side::Upper => pool.neg(away),
    };
    assume::sign(model, inward).is_positive()
}

/// Whether the equation keeps a state that is at the end where it is.
fn rests_at(model: &Model, dynamics: &Dynamics, state: usize, rule: &Ruled) -> bool {
    let pool = &model.pool;
    let there = [(model.states[state].symbol, rule.end)]
        .into_iter()
        .collect();
    let drift = pool.substitute(dynamics.states[state].drift, &there);
    pool.is_zero(drift).is_yes()
}
