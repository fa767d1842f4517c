//! What a one-step scheme does at the ends of a domain.

use super::{EdgeRule, SchemeName};
use crate::analysis::asymptotics::{Leading, Side, at_end};
use crate::analysis::boundary::{End, classify};
use crate::analysis::coordinate::through;
use crate::analysis::limits::{Limit, limit};
use crate::analysis::sample;
use crate::calculus::{Dynamics, covariation};
use crate::model::{AtEdge, Model};
use crate::symbolic::{Bound, Expr, Function, Interval, Rational, Sign};

/// The ends a state is projected to when its coefficients are taken.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Projection {
    /// The lower end.
    pub(super) lower: Option<Expr>,
    /// The upper end.
    pub(super) upper: Option<Expr>,
}

impl Projection {
    pub(super) fn is_none(self) -> bool {
        self.lower.is_none() && self.upper.is_none()
    }

    /// `max(u, lower)`, `min(u, upper)` or both.
    pub(super) fn apply(self, model: &Model, u: Expr) -> Expr {
        let pool = &model.pool;
        let raised = self
            .lower
            .map_or(u, |end| pool.call(Function::Max, &[u, end]));
        self.upper
            .map_or(raised, |end| pool.call(Function::Min, &[raised, end]))
    }
}

/// Which finite ends of a state's domain need the projection: closed ends at which the equation itself
/// rules and has a drift, ends at which the noise vanishes like a root, so that the coefficients have no value
/// beyond, and every finite end where full truncation was asked for. `calm`: nothing random reaches the
/// state; it does not need one at an end that it does not reach.
pub(super) fn projection(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
    calm: bool,
) -> Projection {
    let declared = &model.states[state];
    let asked = matches!(declared.scheme, Some((SchemeName::FullTruncationEuler, _)));
    let end = |side: Side| {
        let (bound, rule) = bound_and_rule(model, state, side);
        let end = bound.value()?;
        let needed = match (bound, rule) {
            (Bound::Closed(_), Some(AtEdge::Absorb | AtEdge::Reflect)) => false,
            _ if calm && classify(model, dynamics, state, side) == End::NotReached => false,
            (Bound::Closed(_), Some(AtEdge::AsEquation)) => has_drift(model, dynamics, state, side),
            (Bound::Closed(_), None) => vanishes(model, dynamics, state, end),
            _ => vanishes_like_root(model, dynamics, state, bound, side),
        };
        let ruled = matches!(rule, Some(AtEdge::Absorb | AtEdge::Reflect));
        (needed || (asked && !ruled)).then_some(end)
    };
    Projection {
        lower: end(Side::Lower),
        upper: end(Side::Upper),
    }
}

fn bound_and_rule(model: &Model, state: usize, side: Side) -> (Bound, Option<AtEdge>) {
    let declared = &model.states[state];
    match side {
        Side::Lower => (declared.domain.lower, declared.at_lower),
        Side::Upper => (declared.domain.upper, declared.at_upper),
    }
}

fn vanishes(model: &Model, dynamics: &Dynamics, state: usize, end: Expr) -> bool {
    let pool = &model.pool;
    let at = [(model.states[state].symbol, end)].into_iter().collect();
    let noise = &dynamics.states[state].diffusion;
    noise
        .iter()
        .all(|&b| pool.is_zero(pool.substitute(b, &at)).is_yes())
}

/// Whether the drift stays finite at an end, so that it can be taken there.
fn has_drift(model: &Model, dynamics: &Dynamics, state: usize, side: Side) -> bool {
    let (bound, _) = bound_and_rule(model, state, side);
    let drift = dynamics.states[state].drift;
    match at_end(&model.pool, drift, model.states[state].symbol, bound, side) {
        Leading::Zero => true,
        Leading::Term { exponent, .. } => exponent >= Rational::ZERO,
        Leading::Unknown => false,
    }
}

fn vanishes_like_root(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
    bound: Bound,
    side: Side,
) -> bool {
    let square = covariation(model, &dynamics.states, state, state);
    match at_end(&model.pool, square, model.states[state].symbol, bound, side) {
        Leading::Term { exponent, .. } => exponent > Rational::ZERO && exponent < Rational::from(2),
        Leading::Zero | Leading::Unknown => false,
    }
}

/// The values a coordinate takes on the state's domain; none where they are not known.
pub(super) fn image(model: &Model, state: usize, forward: Expr) -> Option<Interval> {
    let (pool, x) = (&model.pool, model.states[state].symbol);
    let domain = model.states[state].domain;
    if forward == pool.var(x) {
        return Some(domain);
    }
    let end = |bound: Bound, beyond: Limit| {
        let place = bound.value().map_or(beyond, Limit::Value);
        match limit(pool, forward, x, place) {
            Limit::Value(end) if pool.depends_on(end, model.time) => None,
            Limit::Value(end) if matches!(bound, Bound::Closed(_)) => Some(Bound::Closed(end)),
            Limit::Value(end) => Some(Bound::Open(end)),
            end if end.is_infinite() => Some(Bound::Infinite),
            // Nobody leaves a domain through an end that it does not have.
            Limit::Unknown if bound == Bound::Infinite => Some(Bound::Infinite),
            _ => None,
        }
    };
    let lower = end(domain.lower, Limit::MinusInfinity)?;
    let upper = end(domain.upper, Limit::PlusInfinity)?;
    match pool.sign(pool.derivative(forward, x)) {
        Sign::Positive | Sign::NonNegative => Some(Interval { lower, upper }),
        Sign::Negative | Sign::NonPositive => Some(Interval {
            lower: upper,
            upper: lower,
        }),
        Sign::Zero | Sign::Unknown => None,
    }
}

/// Whether a coordinate rises with the state; none where that was not seen. A coordinate is strictly
/// monotone, so that one value of its slope tells where a proof does not.
fn rises(model: &Model, state: usize, forward: Expr) -> Option<bool> {
    let pool = &model.pool;
    let slope = pool.derivative(forward, model.states[state].symbol);
    match pool.sign(slope) {
        Sign::Positive | Sign::NonNegative => Some(true),
        Sign::Negative | Sign::NonPositive => Some(false),
        Sign::Zero | Sign::Unknown => {
            let slopes = sample::values(pool, slope);
            let all = |up: bool| slopes.iter().all(|&v| v != 0.0 && (v > 0.0) == up);
            (!slopes.is_empty()).then(|| [true, false].into_iter().find(|&up| all(up)))?
        }
    }
}

/// The rules at the lower and upper end of the coordinate's range.
pub(super) fn rules(
    model: &Model,
    state: usize,
    forward: Expr,
) -> (Option<EdgeRule>, Option<EdgeRule>) {
    let rule = |side| rule(model, state, forward, side);
    match rises(model, state, forward) {
        Some(false) => (rule(Side::Upper), rule(Side::Lower)),
        _ => (rule(Side::Lower), rule(Side::Upper)),
    }
}

/// The rule at an end of the state's domain, at the place that the end has in the coordinate; none where
/// nothing is declared, the equation rules, the coordinate is infinite there, or it is not known which end of
/// the coordinate's range it is.
pub(super) fn rule(model: &Model, state: usize, forward: Expr, side: Side) -> Option<EdgeRule> {
    let (bound, rule) = bound_and_rule(model, state, side);
    let x = model.states[state].symbol;
    rises(model, state, forward)?;
    let Limit::Value(end) = limit(&model.pool, forward, x, Limit::Value(bound.value()?)) else {
        return None;
    };
    match rule? {
        AtEdge::Absorb => Some(EdgeRule::Absorb { end }),
        AtEdge::Reflect => Some(EdgeRule::Reflect { end }),
        AtEdge::AsEquation => None,
    }
}

/// What is said of the finite ends of a state without noise that nothing keeps it from, one sentence for
/// each that it is not proved to stay away from.
pub(super) fn unguarded(model: &Model, dynamics: &Dynamics, state: usize) -> Vec<String> {
    let name = &model.states[state].name;
    let sides = [(Side::Lower, "lower"), (Side::Upper, "upper")];
    let reached =
        |(side, _): &(Side, &str)| classify(model, dynamics, state, *side) != End::NotReached;
    sides
        .into_iter()
        .filter(reached)
        .filter_map(|(side, word)| Some((word, bound_and_rule(model, state, side).0.value()?)))
        .map(|(word, end)| {
            let end = model.pool.format(end);
            format!(
                "The solution may take {name} beyond its {word} end {end}; paths found there are counted."
            )
        })
        .collect()
}

/// Whether the author's coordinate tells what to do at an end of the domain: it has a known value there, or
/// is infinite, and rises or falls.
pub(super) fn is_placed(model: &Model, state: usize, side: Side) -> bool {
    let declared = &model.states[state];
    let Some(candidate) = through(model, declared) else {
        return false;
    };
    let (bound, _) = bound_and_rule(model, state, side);
    let place = bound.value().map(Limit::Value);
    let there = place.map(|place| limit(&model.pool, candidate.forward, declared.symbol, place));
    there != Some(Limit::Unknown) && rises(model, state, candidate.forward).is_some()
}
