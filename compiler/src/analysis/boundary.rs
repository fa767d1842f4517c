//! Is an end of a state's domain attained? Feller's classification from leading exponents.
//!
//! With xi the distance from the end, inward drift `alpha xi^p` and squared noise `S xi^q`, the
//! scale and speed integrals converge or diverge by the exponents alone (Feller 1952; Karlin and Taylor
//! 1981, section 15.6; Karatzas and Shreve 1991, section 5.5), except where `p = q - 1`: there
//! `c = 2 alpha/S` decides. What is not a matter of numbers becomes a condition in the parameters.

use super::asymptotics::{Leading, Side, at_end};
use super::condition::{All, Condition, Standing, all_standing, concise, consistent};
use super::dependence::{mentioned, sources};
use super::limits::{Limit, limit};
use crate::calculus::{Dynamics, covariation};
use crate::model::Model;
use crate::symbolic::{Bound, Expr, Pool, Rational, Symbol};

/// What Feller's test says of an end.
#[derive(Clone, Debug, PartialEq)]
pub enum End {
    /// Neither reached nor left from: natural or entrance.
    NotReached,
    /// Reached with positive probability: exit or regular.
    Reached,
    /// The rules do not decide for all admissible parameters. Where conditions in the parameters would, they are
    /// given: the end is not reached if all conditions of one alternative hold, and only then.
    Undecided(Option<Vec<All>>),
}

/// A class of ends.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Class {
    /// Neither attained nor left.
    Natural,
    /// Not attained from inside, left where the process starts there.
    Entrance,
    /// Not attained; which of the two was not asked.
    NotAttained,
    /// Attained and left again, unless the model says otherwise.
    Regular,
    /// Attained and not left.
    Exit,
    /// Attained; which of the two was not asked.
    Attained,
    /// Not classified.
    Unknown,
}

impl Class {
    /// The name in JSON.
    pub fn name(self) -> &'static str {
        match self {
            Self::Natural => "natural",
            Self::Entrance => "entrance",
            Self::NotAttained => "not attained",
            Self::Regular => "regular",
            Self::Exit => "exit",
            Self::Attained => "attained",
            Self::Unknown => "undecided",
        }
    }

    /// Whether an end of the class is attained; none where that is not known.
    pub fn is_attained(self) -> Option<bool> {
        match self {
            Self::Natural | Self::Entrance | Self::NotAttained => Some(false),
            Self::Regular | Self::Exit | Self::Attained => Some(true),
            Self::Unknown => None,
        }
    }
}

/// A class of an end, and when it is of that class.
#[derive(Clone, Debug, PartialEq)]
pub struct Case {
    /// The class.
    pub class: Class,
    /// All of these hold.
    pub when: All,
}

/// The classes an end may have: exactly one case applies, whatever the parameters. Conditions that the ranges or the
/// assumptions exclude are among them.
///
/// Where the coefficients depend on other states or on time only the cases are decided in which the
/// logarithm of the distance has coefficients that stay bounded below near the end, and infinite ends towards which
/// the drift grows at most linearly.
pub fn cases(model: &Model, dynamics: &Dynamics, state: usize, side: Side) -> Vec<Case> {
    let (pool, x) = (&model.pool, model.states[state].symbol);
    let process = &dynamics.states[state];
    let bound = bound(model, state, side);
    let square = covariation(model, &dynamics.states, state, state);
    let (inward, spread) = toward(model, x, process.drift, square, bound, side);
    let drift = at_end(pool, inward, x, bound, side);
    let noise = at_end(pool, spread, x, bound, side);
    let time = pool.depends_on(process.drift, model.time) || pool.depends_on(square, model.time);
    let own = sources(model, dynamics, state)
        .into_iter()
        .all(|j| j == state);
    let found = match (drift, noise) {
        (Leading::Unknown, _) => unknown(),
        (drift, Leading::Zero) => without_noise(pool, &drift),
        (
            drift,
            Leading::Term {
                coefficient,
                exponent,
            },
        ) if own && !time => feller(pool, &drift, coefficient, pool.number(exponent)),
        (drift, Leading::Term { exponent, .. }) => log_distance(model, &drift, &exponent),
        (drift, Leading::Unknown) => match (own && !time, power_law(model, state, square, bound)) {
            (true, Some((s, q))) => feller(pool, &drift, s, q),
            _ => unknown(),
        },
    };
    let undecided = found.iter().all(|c| c.class == Class::Unknown);
    if undecided && bound == Bound::Infinite && at_most_linear(model, dynamics, state, side) {
        return vec![always(Class::NotAttained)];
    }
    found
}

/// Classifies an end of a state's domain in the state's own equation.
pub fn classify(model: &Model, dynamics: &Dynamics, state: usize, side: Side) -> End {
    let cases = cases(model, dynamics, state, side);
    match not_attained(model, &cases) {
        (Standing::Implied, _) => End::NotReached,
        (Standing::Contradicted, _) => End::Reached,
        (Standing::Open, alternatives) => End::Undecided(alternatives),
    }
}

/// Whether an end with these cases is not attained, and the alternatives under which that is so; none where some
/// admissible parameters fall under no rule.
pub fn not_attained(model: &Model, cases: &[Case]) -> (Standing, Option<Vec<All>>) {
    let possible = |c: &&Case| all_standing(model, &c.when) != Standing::Contradicted;
    let left: Vec<Option<bool>> = cases
        .iter()
        .filter(possible)
        .map(|c| c.class.is_attained())
        .collect();
    let alternatives: Vec<All> = cases
        .iter()
        .filter(|c| c.class.is_attained() == Some(false))
        .map(|c| c.when.clone())
        .collect();
    if left.contains(&None) {
        return (Standing::Open, None);
    }
    let standing = if left.iter().all(|&attained| attained == Some(false)) {
        Standing::Implied
    } else if left.iter().all(|&attained| attained == Some(true)) {
        Standing::Contradicted
    } else {
        Standing::Open
    };
    (standing, Some(concise(model, alternatives)))
}

/// The end of a state's domain at a side.
pub fn bound(model: &Model, state: usize, side: Side) -> Bound {
    match side {
        Side::Lower => model.states[state].domain.lower,
        Side::Upper => model.states[state].domain.upper,
    }
}

fn always(class: Class) -> Case {
    Case {
        class,
        when: All::new(),
    }
}

fn unknown() -> Vec<Case> {
    vec![always(Class::Unknown)]
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

/// Coefficient and exponent of a squared noise that is a power of the distance from a finite end, the exponent a
/// formula in the parameters.
fn power_law(model: &Model, state: usize, square: Expr, bound: Bound) -> Option<(Expr, Expr)> {
    let (pool, x) = (&model.pool, model.states[state].symbol);
    let end = bound.value()?;
    let distance = match bound == model.states[state].domain.lower {
        true => pool.sub(pool.var(x), end),
        false => pool.sub(end, pool.var(x)),
    };
    let slope = pool.div(
        pool.derivative(square, x),
        pool.mul(pool.derivative(distance, x), square),
    );
    let exponent = pool.simplify(pool.mul(distance, slope));
    let coefficient = pool.simplify(pool.div(square, pool.pow(distance, exponent)));
    let constant = !pool.depends_on(exponent, x) && !pool.depends_on(coefficient, x);
    constant.then_some((coefficient, exponent))
}

/// Whether the drift of a state is a function of itself, and of time, that grows at most linearly towards an infinite
/// end or leads away from it. Then `exp(-K t) |x|` is near the end at most a continuous local martingale, which does
/// not tend to infinity in finite time, whatever the noise (Revuz and Yor 1999, proposition V.1.8).
fn at_most_linear(model: &Model, dynamics: &Dynamics, state: usize, side: Side) -> bool {
    let (pool, x) = (&model.pool, model.states[state].symbol);
    let drift = dynamics.states[state].drift;
    if mentioned(model, drift).into_iter().any(|j| j != state) {
        return false;
    }
    match at_end(pool, drift, x, Bound::Infinite, side) {
        Leading::Zero => true,
        Leading::Term { exponent, .. } if -&exponent <= Rational::ONE => true,
        Leading::Term { coefficient, .. } => {
            let sign = super::assume::sign(model, coefficient);
            match side {
                Side::Lower => sign.is_positive(),
                Side::Upper => sign == crate::symbolic::Sign::Negative,
            }
        }
        Leading::Unknown => {
            let place = match side {
                Side::Lower => Limit::MinusInfinity,
                Side::Upper => Limit::PlusInfinity,
            };
            matches!(limit(pool, drift, x, place), Limit::Value(_))
        }
    }
}

/// A state without noise reaches an end only if the drift towards it does not vanish fast enough.
fn without_noise(pool: &Pool, drift: &Leading) -> Vec<Case> {
    match drift {
        Leading::Zero => vec![always(Class::NotAttained)],
        Leading::Term { exponent, .. } if *exponent >= Rational::ONE => {
            vec![always(Class::NotAttained)]
        }
        Leading::Term { coefficient, .. } => {
            by_drift(pool, *coefficient, Class::NotAttained, Class::Attained)
        }
        Leading::Unknown => unknown(),
    }
}

/// The inward drift decides by its sign.
fn by_drift(pool: &Pool, alpha: Expr, inward: Class, outward: Class) -> Vec<Case> {
    let zero = pool.zero();
    cases_of(
        pool,
        [
            (inward, vec![Condition::greater(alpha, zero)]),
            (outward, vec![Condition::greater(zero, alpha)]),
            (Class::Unknown, vec![Condition::equal(alpha, zero)]),
        ],
    )
}

fn cases_of<const N: usize>(pool: &Pool, rows: [(Class, All); N]) -> Vec<Case> {
    rows.into_iter()
        .filter_map(|(class, when)| {
            let when = consistent(pool, when)?;
            Some(Case { class, when })
        })
        .collect()
}

/// The logarithm of the distance has drift `alpha xi^(p-1) - S xi^(q - 2)/2`: bounded below near the
/// end if `q >= 2` and either `p >= 1` or the drift points inward.
fn log_distance(model: &Model, drift: &Leading, q: &Rational) -> Vec<Case> {
    if *q < Rational::from(2) {
        return unknown();
    }
    let cases = without_noise(&model.pool, drift);
    match not_attained(model, &cases) {
        (Standing::Implied, _) => vec![always(Class::NotAttained)],
        _ => unknown(),
    }
}

/// The table of exponents for a one-dimensional autonomous diffusion with squared noise `s xi^q`.
fn feller(pool: &Pool, drift: &Leading, s: Expr, q: Expr) -> Vec<Case> {
    use Class::{Entrance, Exit, Natural, Regular};
    let (one, two) = (pool.one(), pool.int(2));
    let (at_least, greater) = (Condition::at_least, Condition::greater);
    let Leading::Term {
        coefficient: alpha,
        exponent: p,
    } = drift
    else {
        return match drift {
            Leading::Zero => cases_of(
                pool,
                [
                    (Natural, vec![at_least(q, two)]),
                    (Exit, vec![at_least(q, one), greater(two, q)]),
                    (Regular, vec![greater(one, q)]),
                ],
            ),
            _ => unknown(),
        };
    };
    let critical = pool.number(p + &Rational::ONE);
    let (steep, balanced, flat) = (
        greater(critical, q),
        Condition::equal(q, critical),
        greater(q, critical),
    );
    // c = 2 alpha/S against 1 and against q - 1 = p; where c is a number, whatever S
    let c = pool.simplify(pool.div(pool.mul(two, *alpha), s));
    let (double, s) = match pool.as_number(c) {
        Some(_) => (c, one),
        None => (pool.mul(two, *alpha), s),
    };
    let lower = pool.mul(pool.number(p.clone()), s);
    let mut cases = cases_of(
        pool,
        [
            (Natural, vec![steep, at_least(q, two)]),
            (Exit, vec![steep, at_least(q, one), greater(two, q)]),
            (Regular, vec![steep, greater(one, q)]),
            (Natural, vec![balanced, at_least(q, two)]),
            (
                Entrance,
                vec![balanced, greater(two, q), at_least(double, s)],
            ),
            (
                Regular,
                vec![
                    balanced,
                    greater(two, q),
                    greater(double, lower),
                    greater(s, double),
                ],
            ),
            (
                Exit,
                vec![balanced, greater(two, q), at_least(lower, double)],
            ),
        ],
    );
    let rest = if *p >= Rational::ONE {
        vec![always(Natural)]
    } else {
        by_drift(pool, *alpha, Entrance, Exit)
    };
    cases.extend(rest.into_iter().filter_map(|case| {
        let when = consistent(pool, std::iter::once(flat).chain(case.when))?;
        Some(Case { when, ..case })
    }));
    merged(pool, cases)
}

/// Cases of one class as alternatives that are joined where they can be.
fn merged(pool: &Pool, cases: Vec<Case>) -> Vec<Case> {
    let mut classes: Vec<Class> = Vec::new();
    for case in &cases {
        if !classes.contains(&case.class) {
            classes.push(case.class);
        }
    }
    let of = |class: Class| -> Vec<All> {
        let same = cases.iter().filter(|c| c.class == class);
        same.map(|c| c.when.clone()).collect()
    };
    classes
        .into_iter()
        .flat_map(|class| {
            let joined = super::condition::joined(pool, of(class));
            joined.into_iter().map(move |when| Case { class, when })
        })
        .collect()
}
