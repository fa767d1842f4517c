//! Drift-implicit Euler: in which coordinate, and whether each step has one solution.
//!
//! `u' - h a(u', t + h) = u + noise`, in a coordinate whose noise does not depend on the states (Alfonsi 2005 for square-root
//! processes; Dereich, Neuenkirch and Szpruch 2012; Neuenkirch and Szpruch 2014 for Lamperti's coordinate in general). The left side rises
//! in u' where the drift is one-sided Lipschitz and the step is short; a drift that goes to infinity at the finite ends of the
//! coordinate keeps the solution inside.

use super::edges::{self, Projection};
use super::{Coordinate, Implicit, Order, step};
use crate::analysis::assume;
use crate::analysis::asymptotics::{Leading, Side, at_end};
use crate::analysis::boundary::{End, classify};
use crate::analysis::coordinate::{Candidate, candidates, through};
use crate::analysis::free::{Freedom, free_of, kink_in};
use crate::analysis::limits::{Limit, limit};
use crate::analysis::square_root::lamperti;
use crate::calculus::{Dynamics, Process, expand};
use crate::model::{AtEdge, Model};
use crate::symbolic::trace::Trace;
use crate::symbolic::{Bound, Expr, Interval, Pool, Rational, Sign, Symbol};

/// A coordinate for the scheme, with Ito's rule on it.
pub(super) struct Found {
    pub(super) candidate: Candidate,
    pub(super) process: Process,
    pub(super) trace: Trace,
    /// The strong order; none where none is known.
    pub(super) order: Option<Order>,
    /// What the order hangs on, in words, where the coordinate ends like that of a square-root process.
    pub(super) condition: Option<String>,
    /// Whether the scheme was chosen, not asked for.
    pub(super) chosen: bool,
}

impl Found {
    /// The coordinate to step in, projected nowhere.
    pub(super) fn step_coordinate(
        &self,
        model: &Model,
        state: usize,
    ) -> (Coordinate, Projection, Trace) {
        let coordinate = step::coordinate(model, state, &self.candidate, self.process.clone());
        (coordinate, Projection::default(), self.trace.clone())
    }
}

/// The coordinate in which a state can be stepped, or why there is none.
pub(super) fn coordinate(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
) -> Result<Found, String> {
    let declared = &model.states[state];
    let ruled = |rule: Option<AtEdge>| matches!(rule, Some(AtEdge::Absorb | AtEdge::Reflect));
    if ruled(declared.at_lower) || ruled(declared.at_upper) {
        return Err(format!(
            "{} is absorbed or reflected, which happens within a step",
            declared.name
        ));
    }
    let tried = match &declared.through {
        Some(_) => through(model, declared).into_iter().collect(),
        None => {
            let mut all = candidates(model, declared, None);
            all.extend(lamperti(model, dynamics, state));
            all
        }
    };
    let mut reason = format!(
        "no coordinate of {} is known in which its noise does not depend on the states",
        declared.name
    );
    for candidate in tried {
        match settle(model, dynamics, state, candidate) {
            Ok(found) => return Ok(found),
            Err(Some(why)) => reason = why,
            Err(None) => {}
        }
    }
    Err(reason)
}

/// The coordinate for a state on an open domain without an exact law, whose ends are not reached, where no explicit scheme keeps
/// it inside: a logarithm or a logit in which drift and noise are Lipschitz would come first. An order must be known.
pub(super) fn chosen(model: &Model, dynamics: &Dynamics, state: usize) -> Option<Found> {
    let (pool, declared) = (&model.pool, &model.states[state]);
    let settled = declared.scheme.is_some()
        || declared.through.is_some()
        || declared.at_lower.or(declared.at_upper).is_some();
    let sides = [
        (declared.domain.lower, Side::Lower),
        (declared.domain.upper, Side::Upper),
    ];
    let finite = |(bound, _): &(Bound, Side)| bound.value().is_some();
    let kept = |(bound, side): (Bound, Side)| {
        let reached = classify(model, dynamics, state, side);
        match bound {
            Bound::Open(_) => reached == End::NotReached,
            Bound::Infinite => reached != End::Reached,
            Bound::Closed(_) => false,
        }
    };
    let noise = &dynamics.states[state].diffusion;
    let calm = noise.iter().all(|&b| pool.is_zero_literal(b));
    if settled || calm || !sides.iter().any(finite) || !sides.into_iter().all(kept) {
        return None;
    }
    if step::free_coordinate(model, dynamics, state).is_some() {
        return None;
    }
    let found = coordinate(model, dynamics, state).ok()?;
    found.order.is_some().then_some(Found {
        chosen: true,
        ..found
    })
}

/// Whether a coordinate serves; why not, where its noise is free of the states.
fn settle(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
    candidate: Candidate,
) -> Result<Found, Option<String>> {
    let pool = &model.pool;
    let states: Vec<Symbol> = model.states.iter().map(|s| s.symbol).collect();
    let mut expansion = expand(model, &dynamics.states, candidate.forward);
    for noise in &mut expansion.diffusion {
        match free_of(pool, *noise, &states) {
            Freedom::Free(value) => *noise = value,
            Freedom::DependsOn(_) | Freedom::CannotTell(_) => return Err(None),
        }
    }
    let x = model.states[state].symbol;
    let shown = pool.format(candidate.forward);
    if kink_in(pool, expansion.drift, &[x]).is_some() {
        return Err(Some(format!("the drift of {shown} has a kink")));
    }
    let domain = model.states[state].domain;
    let range = match candidate.is_identity() {
        true => domain,
        false => edges::image(model, state, candidate.forward)
            .ok_or_else(|| Some(format!("the range of {shown} is not known")))?,
    };
    pool.set_ranges([(candidate.symbol, range)]);
    let back = [(x, candidate.inverse)].into_iter().collect();
    let drift = pool.simplify(pool.substitute(expansion.drift, &back));
    let place = Place {
        model,
        u: candidate.symbol,
        range,
    };
    let own = Place {
        model,
        u: x,
        range: domain,
    };
    // Near a finite end of the domain the slope in the coordinate is often easier to see as a formula in the state.
    let slope = pool.div(
        pool.derivative(expansion.drift, x),
        pool.derivative(candidate.forward, x),
    );
    let inner = pool.derivative(drift, candidate.symbol);
    if !place.is_bounded_above(inner) && !own.is_bounded_above(slope) {
        return Err(Some(format!(
            "the drift of {shown} could not be shown to be one-sided Lipschitz"
        )));
    }
    if !place.is_kept_inside(drift) {
        return Err(Some(format!(
            "the drift of {shown} does not go to infinity at each end of its range, so that a step might have no solution"
        )));
    }
    let process = Process {
        drift: expansion.drift,
        diffusion: expansion.diffusion,
    };
    let (order, condition) = place.order(drift, squared(model, &process.diffusion));
    Ok(Found {
        process,
        trace: expansion.trace,
        candidate,
        order,
        condition,
        chosen: false,
    })
}

/// The variance rate of noise with these coefficients.
fn squared(model: &Model, noise: &[Expr]) -> Expr {
    let pool = &model.pool;
    let product = |j: usize, k: usize| pool.product([noise[j], model.correlation[j][k], noise[k]]);
    let pairs = (0..noise.len()).flat_map(|j| (0..noise.len()).map(move |k| (j, k)));
    pool.simplify(pool.sum(pairs.map(|(j, k)| product(j, k)).collect::<Vec<_>>()))
}

/// A coordinate and its range.
struct Place<'a> {
    model: &'a Model,
    u: Symbol,
    range: Interval,
}

impl Place<'_> {
    fn ends(&self) -> [(Bound, Side, Limit); 2] {
        let at = |bound: Bound, infinite: Limit| bound.value().map_or(infinite, Limit::Value);
        [
            (
                self.range.lower,
                Side::Lower,
                at(self.range.lower, Limit::MinusInfinity),
            ),
            (
                self.range.upper,
                Side::Upper,
                at(self.range.upper, Limit::PlusInfinity),
            ),
        ]
    }

    /// Whether the derivative of a drift is bounded from above: formulas here are continuous inside.
    fn is_bounded_above(&self, slope: Expr) -> bool {
        let pool = &self.model.pool;
        let slope = pool.simplify(slope);
        self.ends()
            .into_iter()
            .all(|(bound, side, end)| match limit(pool, slope, self.u, end) {
                Limit::Value(_) | Limit::MinusInfinity => true,
                Limit::PlusInfinity => false,
                Limit::Infinity | Limit::Unknown => {
                    match at_end(pool, slope, self.u, bound, side) {
                        Leading::Zero => true,
                        Leading::Term {
                            exponent,
                            coefficient,
                        } => {
                            exponent >= Rational::ZERO
                                || assume::sign(self.model, coefficient) == Sign::Negative
                        }
                        Leading::Unknown => false,
                    }
                }
            })
    }

    /// The strong order, and its condition where the drift goes to infinity like `c/d` with the distance d from a finite
    /// end, as that of the root of a square-root process does: with squared noise s^2 the order in mean is 1 for `c > s^2`
    /// (Alfonsi 2013) and 1/2 for `2 c >= s^2`, where the end is not reached (Dereich, Neuenkirch and Szpruch 2012). A
    /// faster drift leaves all moments of its derivatives finite (Neuenkirch and Szpruch 2014).
    fn order(&self, drift: Expr, square: Expr) -> (Option<Order>, Option<String>) {
        let pool = &self.model.pool;
        let (mut order, mut condition) = (Some(Order::ONE), None);
        let finite = |(bound, ..): &(Bound, Side, Limit)| bound.value().is_some();
        for (bound, side, _) in self.ends().into_iter().filter(finite) {
            let Leading::Term {
                exponent,
                coefficient,
            } = at_end(pool, drift, self.u, bound, side)
            else {
                return (None, None);
            };
            if exponent != -Rational::ONE {
                continue;
            }
            let rate = match side {
                Side::Lower => coefficient,
                Side::Upper => pool.neg(coefficient),
            };
            let above = |multiple: i64| {
                let product = pool.mul(pool.int(multiple), rate);
                assume::sign(self.model, pool.simplify(pool.sub(product, square)))
            };
            if above(1) != Sign::Positive {
                let half = above(2).is_non_negative().then_some(Order::HALF);
                order = order.and(half);
            }
            condition = Some(format!(
                "At the finite end its drift grows like c/d with the distance d, c = {}; with the squared noise {} strong \
                 order 1 in mean takes c greater than it (Alfonsi 2013), 1/2 takes 2 c at least as great (Dereich, \
                 Neuenkirch and Szpruch 2012).",
                pool.format(pool.simplify(rate)),
                pool.format(square)
            ));
        }
        (order, condition)
    }

    /// Whether the drift goes to plus infinity at a finite lower end, and to minus infinity at a finite upper one.
    fn is_kept_inside(&self, drift: Expr) -> bool {
        let finite = |(bound, ..): &(Bound, Side, Limit)| bound.value().is_some();
        self.ends()
            .into_iter()
            .filter(finite)
            .all(|(bound, side, _)| {
                let Leading::Term {
                    exponent,
                    coefficient,
                } = at_end(&self.model.pool, drift, self.u, bound, side)
                else {
                    return false;
                };
                let sign = assume::sign(self.model, coefficient);
                let inward = match side {
                    Side::Lower => sign.is_positive(),
                    Side::Upper => sign == Sign::Negative,
                };
                inward && exponent < Rational::ZERO
            })
    }
}

/// How the equation of a step is solved for a drift in the coordinate `u`.
pub(super) fn solution(pool: &Pool, drift: Expr, u: Symbol) -> Implicit {
    quadratic(pool, drift, u).unwrap_or_else(|| Implicit::Newton {
        slope: pool.simplify(pool.derivative(drift, u)),
    })
}

/// `a(u) = pole/u + constant + slope u` on the half line from 0.
fn quadratic(pool: &Pool, drift: Expr, u: Symbol) -> Option<Implicit> {
    let free = |e: Expr| match free_of(pool, e, &[u]) {
        Freedom::Free(value) => Some(value),
        Freedom::DependsOn(_) | Freedom::CannotTell(_) => None,
    };
    let range = pool.range(u);
    let from_zero = range.lower.value().is_some_and(|e| pool.is_zero_literal(e));
    if !from_zero || range.upper.value().is_some() {
        return None;
    }
    let var = pool.var(u);
    let product = pool.simplify(pool.mul(var, drift));
    let first = pool.derivative(product, u);
    let slope = free(pool.mul(pool.ratio(1, 2), pool.derivative(first, u)))?;
    let constant = free(pool.sub(first, pool.product([pool.int(2), slope, var])))?;
    let rest = pool.add(pool.mul(slope, pool.square(var)), pool.mul(constant, var));
    let pole = free(pool.sub(product, rest))?;
    Some(Implicit::Quadratic {
        pole,
        constant,
        slope,
    })
}
