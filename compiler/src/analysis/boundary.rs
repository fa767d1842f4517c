//! Is an end of a state's domain reached? Feller's classification from leading exponents.
//!
//! With xi the distance from the end, inward drift `alpha xi^p` and squared noise `S xi^(2 beta)`, the
//! scale and speed integrals converge or diverge by the exponents alone (Feller 1952; Karlin and Taylor
//! 1981, section 15.6; Karatzas and Shreve 1991, section 5.5), except where `p = 2 beta - 1`: there
//! `c = 2 alpha/S` decides.

use super::assume;
use super::asymptotics::{Leading, Side, at_end};
use super::dependence::sources;
use crate::calculus::{Dynamics, covariation};
use crate::model::Model;
use crate::symbolic::{Bound, Expr, Rational, Sign, Symbol};

/// What Feller's test says of an end.
#[derive(Clone, Debug, PartialEq)]
pub enum End {
    /// Neither reached nor left from: natural or entrance.
    NotReached,
    /// Reached with positive probability: exit or regular.
    Reached,
    /// The rules do not decide. Where one inequality would, it is given: the end is not reached if
    /// this formula is at least 0.
    Undecided(Option<Expr>),
}

/// Classifies an end of a state's domain in the state's own equation.
///
/// Where the coefficients depend on other states or on time only the cases are decided in which the
/// logarithm of the distance has coefficients that stay bounded below near the end.
pub fn classify(model: &Model, dynamics: &Dynamics, state: usize, side: Side) -> End {
    let (pool, x) = (&model.pool, model.states[state].symbol);
    let process = &dynamics.states[state];
    let bound = match side {
        Side::Lower => model.states[state].domain.lower,
        Side::Upper => model.states[state].domain.upper,
    };
    let square = covariation(model, &dynamics.states, state, state);
    let (inward, spread) = toward(model, x, process.drift, square, bound, side);
    let drift = at_end(pool, inward, x, bound, side);
    let noise = at_end(pool, spread, x, bound, side);
    let time = pool.depends_on(process.drift, model.time) || pool.depends_on(square, model.time);
    let own = sources(model, dynamics, state)
        .into_iter()
        .all(|j| j == state);
    match (drift, noise) {
        (Leading::Unknown, _) | (_, Leading::Unknown) => End::Undecided(None),
        (drift, Leading::Zero) => without_noise(model, &drift),
        (
            drift,
            Leading::Term {
                coefficient,
                exponent,
            },
        ) if own && !time => feller(model, &drift, coefficient, &exponent),
        (drift, Leading::Term { exponent, .. }) => log_distance(model, &drift, &exponent),
    }
}

/// Drift and squared noise of the distance from an end; for an infinite end of the reciprocal `1/|x|`,
/// by Ito's rule.
fn toward(
    model: &Model,
    x: Symbol,
    drift: Expr,
    square: Expr,
    bound: Bound,
    side: Side,
) -> (Expr, Expr) {
    let pool = &model.pool;
    let (mut inward, mut spread) = (drift, square);
    if bound == Bound::Infinite {
        let power = |n: i64| pool.pow(pool.var(x), pool.int(-n));
        let curved = pool.mul(square, power(3));
        inward = pool.sub(curved, pool.mul(drift, power(2)));
        spread = pool.mul(square, power(4));
    }
    match side {
        Side::Lower if bound == Bound::Infinite => (pool.neg(inward), spread),
        Side::Upper if bound != Bound::Infinite => (pool.neg(inward), spread),
        Side::Lower | Side::Upper => (inward, spread),
    }
}

/// A state without noise reaches an end only if the drift towards it does not vanish fast enough.
fn without_noise(model: &Model, drift: &Leading) -> End {
    match drift {
        Leading::Zero => End::NotReached,
        Leading::Term { exponent, .. } if *exponent >= Rational::ONE => End::NotReached,
        Leading::Term { coefficient, .. } => match assume::sign(model, *coefficient) {
            Sign::Positive => End::NotReached,
            Sign::Negative => End::Reached,
            _ => End::Undecided(None),
        },
        Leading::Unknown => End::Undecided(None),
    }
}

/// The logarithm of the distance has drift `alpha xi^(p-1) - S xi^(2 beta - 2)/2`: bounded below near the
/// end if `beta >= 1` and either `p >= 1` or the drift points inward.
fn log_distance(model: &Model, drift: &Leading, square: &Rational) -> End {
    if *square < Rational::from(2) {
        return End::Undecided(None);
    }
    without_noise(model, drift).or_undecided()
}

impl End {
    fn or_undecided(self) -> Self {
        match self {
            Self::NotReached => Self::NotReached,
            Self::Reached | Self::Undecided(_) => Self::Undecided(None),
        }
    }
}

/// The table of exponents for a one-dimensional autonomous diffusion; `square` is `2 beta`.
fn feller(model: &Model, drift: &Leading, s: Expr, square: &Rational) -> End {
    let natural = *square >= Rational::from(2);
    let by_noise = if natural {
        End::NotReached
    } else {
        End::Reached
    };
    let Leading::Term {
        coefficient: alpha,
        exponent: p,
    } = drift
    else {
        return by_noise;
    };
    let r = p - square;
    let minus_one = -Rational::ONE;
    if r > minus_one || (r == minus_one && natural) {
        return by_noise;
    }
    let pool = &model.pool;
    if r == minus_one {
        // c = 2 alpha/S against 1
        let margin = pool.simplify(pool.sub(pool.mul(pool.int(2), *alpha), s));
        return match assume::sign(model, margin) {
            Sign::Positive | Sign::NonNegative | Sign::Zero => End::NotReached,
            Sign::Negative => End::Reached,
            Sign::NonPositive | Sign::Unknown => End::Undecided(Some(margin)),
        };
    }
    if *p >= Rational::ONE {
        return End::NotReached;
    }
    match assume::sign(model, *alpha) {
        Sign::Positive => End::NotReached,
        Sign::Negative => End::Reached,
        _ => End::Undecided(None),
    }
}
