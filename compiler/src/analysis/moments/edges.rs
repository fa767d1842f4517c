//! What Ito's rule, moments and martingale proofs may assume at the ends of a state's domain.
//!
//! They hold until an end is reached, and beyond it only if the coefficients keep the process inside.

use std::collections::BTreeMap;

use crate::analysis::asymptotics::Side;
use crate::analysis::end_rules::starts_off;
use crate::analysis::linear::{self, Rows};
use crate::analysis::{assume, boundary};
use crate::calculus::Dynamics;
use crate::model::{AtEdge, Model};
use crate::symbolic::{Bound, Expr, Function, Node, Pool, Sign, Symbol, Truth};

/// What happens at the ends of a state's domain, as far as it is proved; ordered from good to bad.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Edge {
    /// No end is ever reached.
    NeverReached,
    /// A finite end may be reached, and the coefficients keep the process in the closed domain.
    KeptInside,
    /// Neither proved nor refuted.
    Undecided,
    /// The process leaves through an end, or what happens there is not what the equation says.
    Left,
}

/// The worse of the two ends of a state's domain.
pub fn edge(model: &Model, dynamics: &Dynamics, state: usize) -> Edge {
    let declared = &model.states[state];
    let lower = at_end(model, dynamics, state, Side::Lower, declared.at_lower);
    lower.max(at_end(
        model,
        dynamics,
        state,
        Side::Upper,
        declared.at_upper,
    ))
}

/// The largest linear Gaussian system whose law holds at all times. A state that nothing random reaches
/// may have a row although its domain is not the whole line; its solution is known only until it comes
/// to an end that does not keep it.
pub(super) fn rows_that_hold(model: &Model, dynamics: &Dynamics) -> Rows {
    let mut excluded = BTreeMap::new();
    loop {
        let rows = linear::find(model, dynamics, &excluded);
        let lost = rows.iter().enumerate().find(|(i, row)| {
            row.as_ref().is_ok_and(|row| !row.coordinate.onto_line)
                && edge(model, dynamics, *i) > Edge::KeptInside
        });
        match lost {
            Some((i, _)) => {
                let reason = format!("{} may leave its domain", model.states[i].name);
                excluded.insert(i, reason)
            }
            None => return rows,
        };
    }
}

/// Whether a formula and its first two derivatives in a state have values at the finite ends of the
/// state's domain, so that Ito's rule holds there too.
pub fn is_smooth_at_ends(model: &Model, state: usize, formula: Expr) -> bool {
    let pool = &model.pool;
    let declared = &model.states[state];
    let slope = pool.derivative(formula, declared.symbol);
    let curvature = pool.derivative(slope, declared.symbol);
    let ends = [declared.domain.lower, declared.domain.upper];
    ends.into_iter().filter_map(Bound::value).all(|end| {
        [formula, slope, curvature]
            .into_iter()
            .all(|e| value_at(pool, e, declared.symbol, end).is_some())
    })
}

fn at_end(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
    side: Side,
    at: Option<AtEdge>,
) -> Edge {
    let domain = model.states[state].domain;
    let end = match side {
        Side::Lower => domain.lower.value(),
        Side::Upper => domain.upper.value(),
    };
    let class = boundary::classify(model, dynamics, state, side);
    match (class, end) {
        (boundary::End::NotReached, end) if !stays_from_start(model, state, side, end, at) => {
            Edge::NeverReached
        }
        (boundary::End::Reached, None) => Edge::Left,
        // Explosion is not excluded here but by the growth of the coefficients, where that matters.
        (boundary::End::NotReached | boundary::End::Undecided(_), None) => Edge::NeverReached,
        (class, Some(end)) => {
            let kept = kept_inside(model, dynamics, state, side, end, at);
            match (kept, class) {
                (Edge::Undecided, boundary::End::Reached) => Edge::Left,
                (kept, _) => kept,
            }
        }
    }
}

/// Whether the state may start on an end that absorbs.
fn stays_from_start(
    model: &Model,
    state: usize,
    side: Side,
    end: Option<Expr>,
    at: Option<AtEdge>,
) -> bool {
    at == Some(AtEdge::Absorb) && end.is_some_and(|end| !starts_off(model, state, side, end))
}

/// Whether the coefficients keep the process inside at an end that it may reach: no noise there, and
/// no drift that leads out.
fn kept_inside(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
    side: Side,
    end: Expr,
    at: Option<AtEdge>,
) -> Edge {
    let pool = &model.pool;
    let symbol = model.states[state].symbol;
    let process = &dynamics.states[state];
    for &noise in &process.diffusion {
        match value_at(pool, noise, symbol, end).map(|value| pool.is_zero(value)) {
            Some(Truth::Yes) => {}
            Some(Truth::No(_)) => return Edge::Left,
            Some(Truth::CannotTell) | None => return Edge::Undecided,
        }
    }
    let Some(drift) = value_at(pool, process.drift, symbol, end) else {
        return Edge::Undecided;
    };
    let inward = match side {
        Side::Lower => pool.simplify(drift),
        Side::Upper => pool.simplify(pool.neg(drift)),
    };
    match assume::sign(model, inward) {
        Sign::Zero => Edge::KeptInside,
        // Absorption stops a drift that would lead away from the end.
        Sign::Positive | Sign::NonNegative if at == Some(AtEdge::Absorb) => Edge::Left,
        Sign::Positive | Sign::NonNegative => Edge::KeptInside,
        Sign::Negative => Edge::Left,
        Sign::NonPositive | Sign::Unknown => Edge::Undecided,
    }
}

/// The value of a formula at `symbol = end`; none where it has none there, as `1/x` at 0.
fn value_at(pool: &Pool, e: Expr, symbol: Symbol, end: Expr) -> Option<Expr> {
    let e = pool.simplify(e);
    let at = BTreeMap::from([(symbol, end)]);
    let vanishes = |part: Expr| {
        pool.depends_on(part, symbol) && !pool.is_zero(pool.substitute(part, &at)).is_no()
    };
    let singular = pool
        .postorder(e)
        .into_iter()
        .any(|part| match &*pool.node(part) {
            Node::Power(base, exponent) if vanishes(*base) => !pool.sign(*exponent).is_positive(),
            Node::Call(Function::Log, arguments) => vanishes(arguments[0]),
            _ => false,
        });
    (!singular).then(|| pool.substitute(e, &at))
}
