//! When a driftless diffusion is a true martingale and when it is a strict local one.
//!
//! `dX = b(X) dW` on `(0, inf)`, stopped at 0, is a true martingale if and only if the integral of `x/b(x)^2` towards
//! infinity is infinite (Delbaen and Shirakawa 2002, "No arbitrage condition for positive diffusion price processes");
//! on the whole line the integrals of `|x|/b(x)^2` towards both ends must be (Kotani 2006, "On a condition that one-dimensional
//! diffusion processes are martingales"). A factor of b in time alone is a change of time where b is a power of x.

use super::asymptotics::{Leading, Side, at_end};
use super::condition::{All, Condition, Standing, all_standing};
use crate::calculus::{Expansion, System, bracket};
use crate::model::{AtEdge, Model};
use crate::symbolic::{Bound, Expr, Symbol};

/// The rule in words.
pub const RULE: &str = "a driftless diffusion is a true martingale if and only if the integral of |x|/b(x)^2 towards \
                        infinity is infinite; Delbaen and Shirakawa 2002, Kotani 2006";

/// What the test gives.
pub struct Test {
    /// What follows from ranges and assumptions.
    pub standing: Standing,
    /// The martingale is a true one if and only if all of these hold.
    pub condition: All,
}

/// Applies the test to a multiple of a single state, the factor free of states, whose Ito drift is zero. None where
/// the formula or the state's noise is not of that kind.
pub fn of(model: &Model, system: &System<'_>, expansion: &Expansion) -> Option<Test> {
    let pool = &model.pool;
    let &[i] = system.closure([expansion.formula]).as_slice() else {
        return None;
    };
    let state = &model.states[i];
    let moves = |e: Expr, s: Symbol| pool.depends_on(e, s);
    let factor = pool.simplify(pool.div(expansion.formula, pool.var(state.symbol)));
    if moves(factor, state.symbol) {
        return None;
    }
    let noise = &system.processes[i].diffusion;
    let square = bracket(model, noise, noise);
    let timed = moves(factor, model.time) || moves(square, model.time);
    let mut condition = All::new();
    for side in tails(model, i)? {
        let power = growth_power(model, state.symbol, square, side, timed)?;
        condition.push(Condition::at_least(pool.int(2), power));
    }
    condition.dedup();
    let standing = all_standing(model, &condition);
    let condition = condition.into_iter().map(|c| c.written(pool)).collect();
    Some(Test {
        standing,
        condition,
    })
}

/// The infinite ends that are to be tested; none where the domain is of another kind.
fn tails(model: &Model, state: usize) -> Option<Vec<Side>> {
    let declared = &model.states[state];
    let at_zero = |bound: Bound| {
        bound
            .value()
            .is_some_and(|e| model.pool.is_zero(e).is_yes())
    };
    match (declared.domain.lower, declared.domain.upper) {
        (Bound::Infinite, Bound::Infinite) => Some(vec![Side::Lower, Side::Upper]),
        (Bound::Open(_), Bound::Infinite) if at_zero(declared.domain.lower) => {
            Some(vec![Side::Upper])
        }
        (Bound::Closed(_), Bound::Infinite)
            if at_zero(declared.domain.lower) && declared.at_lower == Some(AtEdge::Absorb) =>
        {
            Some(vec![Side::Upper])
        }
        _ => None,
    }
}

/// The power of |x| that a squared noise grows like; a formula in the parameters where it is a power of x throughout.
/// Noise that moves with time must be such a power. None where the process may come to rest inside its domain, or not
/// move at all.
fn growth_power(model: &Model, x: Symbol, square: Expr, side: Side, timed: bool) -> Option<Expr> {
    let pool = &model.pool;
    let slope = pool.div(pool.derivative(square, x), square);
    let power = pool.simplify(pool.mul(pool.var(x), slope));
    let coefficient = pool.simplify(pool.div(square, pool.pow(pool.var(x), power)));
    let fixed = !pool.depends_on(power, x) && !pool.depends_on(coefficient, x);
    let half_line = pool.range(x).lower != Bound::Infinite;
    if half_line && fixed && !pool.depends_on(power, model.time) {
        return pool.sign(coefficient).is_positive().then_some(power);
    }
    match at_end(pool, square, x, Bound::Infinite, side) {
        Leading::Term { exponent, .. } if !timed && pool.sign(square).is_positive() => {
            Some(pool.number(-exponent))
        }
        _ => None,
    }
}
