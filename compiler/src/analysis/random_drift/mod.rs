//! States that are, in law, Brownian motions with a random drift, or the distance of a Brownian motion
//! with drift from where it started.
//!
//! A scalar diffusion belongs here if some monotone `u = U(x)` has constant noise `s` and a drift `f` with
//! `s^2 f' + f^2 = m^2`, a positive constant. Then `f = s^2 h'/h` with `s^2 h''= (m^2/s^2) h`, and the
//! transition density is that of a Brownian motion times `h(after)/h(before)` and an exponential of time (Doob's
//! transform; Rogers and Williams 2000, section IV.39).
//!
//! - On the whole line `h` is a sum of two exponentials, `f = m tanh(m u/s^2 + c)` (Benes 1981): `u` moves as
//!   `u + m t + s W` or as `u - m t + s W`, the first with probability `(m + f(u))/(2 m)`, drawn anew each step.
//! - On the half line from an end that is not reached `f = m coth(m u/s^2)`: `u` is the distance from 0 of a
//!   three-dimensional Brownian motion with a drift of size `m`, a Bessel process with drift (Watanabe 1975; Rogers
//!   and Pitman 1981). Given `u`, the direction follows the law of von Mises and Fisher about the drift.
//!
//! A candidate U comes from `candidates`; that it is one is then proved by Ito's rule, the zero test and
//! signs, for all admissible parameters.

mod candidates;

use super::coordinate::Candidate;
use super::end_rules::{Ruled, ruled, starts_off};
use super::sample;
use super::scalar::{Finding, Scalar};
use crate::calculus::{Dynamics, Process, bracket, expand};
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Function, Sign};

/// Where the coordinate lives, and with it the law.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Shape {
    /// On the whole line: a drift of either sign.
    Line,
    /// On the half line from 0: the distance from the start.
    HalfLine,
}

/// A state that has such a law in a coordinate.
#[derive(Clone, Debug)]
pub struct RandomDrift {
    /// The coordinate u.
    pub coordinate: Candidate,
    /// Its drift and diffusion by Ito's rule, in the state.
    pub process: Process,
    /// Coefficients of the drivers' increments in it, free of the state.
    pub noise: Vec<Expr>,
    /// `s^2`, the square of its noise.
    pub square: Expr,
    /// `m`, the size of the drift; not negative.
    pub speed: Expr,
    /// Where it lives.
    pub shape: Shape,
    /// The working.
    pub trace: Trace,
}

impl RandomDrift {
    /// `(m + f)/(2 m)` and `(m - f)/(2 m)`, in the state: the weights with which Gaussian laws of the drifts `m` and
    /// `-m` make up the law, the second negative on the half line.
    pub fn weights(&self, model: &Model) -> [Expr; 2] {
        let pool = &model.pool;
        let twice = pool.mul(pool.int(2), self.speed);
        let drift = self.process.drift;
        [
            pool.div(pool.add(self.speed, drift), twice),
            pool.div(pool.sub(self.speed, drift), twice),
        ]
    }
}

/// Looks for a coordinate in which a state has such a law by itself.
///
/// Whether other states share its noise is another question: see [`entangled`](super::scalar::entangled).
pub fn find(model: &Model, dynamics: &Dynamics, state: usize) -> Finding<RandomDrift> {
    let Some(scalar) = Scalar::read(model, dynamics, state) else {
        return Finding::Other;
    };
    let mut found = candidates::candidates(&scalar)
        .into_iter()
        .filter_map(|(shape, candidate)| scalar.prove_random_drift(dynamics, candidate, shape));
    let Some(law) = found.next() else {
        return Finding::Other;
    };
    let what = match law.shape {
        Shape::Line => "a Brownian motion with a random drift",
        Shape::HalfLine => "a Bessel process with drift",
    };
    match scalar.other_coordinate(law.coordinate.forward, what) {
        Some(reason) => Finding::Refused(reason),
        None => Finding::Law(Box::new(law)),
    }
}

impl Scalar<'_> {
    /// Proves that a candidate has such a law.
    ///
    /// Where the drift `f` rises all along the line, `f^2 = m^2 - s^2 f' <= m^2`, so that `h` has no zero. On the half
    /// line `h` has to vanish at 0, which settles `f`.
    fn prove_random_drift(
        &self,
        dynamics: &Dynamics,
        coordinate: Candidate,
        shape: Shape,
    ) -> Option<RandomDrift> {
        let (model, pool) = (self.model, &self.model.pool);
        let u = coordinate.forward;
        let fits = match shape {
            Shape::Line => self.onto_line(u),
            Shape::HalfLine => self.onto_half_line(u) && !self.may_stay_at_start(),
        };
        if !fits {
            return None;
        }
        let mut expansion = expand(model, &dynamics.states, u);
        let noise = expansion.diffusion.iter().map(|&b| self.constant(b));
        let noise = noise.collect::<Option<Vec<Expr>>>()?;
        let square = pool.simplify(bracket(model, &noise, &noise));
        let drift = expansion.drift;
        let rise = pool.div(self.along(drift), self.along(u));
        let sum = pool.add(pool.mul(square, rise), pool.square(drift));
        let size = self.size(sum)?;
        let speed = pool.simplify(pool.sqrt(size));
        let law = match shape {
            Shape::Line => pool.sign_in_exponentials(rise).is_non_negative(),
            Shape::HalfLine => {
                pool.sign(size).is_positive()
                    && pool.sign(square).is_positive()
                    && self.is_cotangent(drift, speed, square, u)
            }
        };
        if !law || !sample::agree(pool, sum, size) {
            return None;
        }
        let trace = &mut expansion.trace;
        let note = "square of the coordinate's noise times the slope of its drift, plus the square of its drift: \
                    a constant, the square of a speed";
        trace.push("drift of a random sign", note, Some(sum), size);
        Some(RandomDrift {
            process: Process {
                drift,
                diffusion: expansion.diffusion,
            },
            trace: expansion.trace,
            coordinate,
            noise,
            square,
            speed,
            shape,
        })
    }

    /// Whether the state may start on an end that absorbs.
    fn may_stay_at_start(&self) -> bool {
        let off = |rule: &Ruled| starts_off(self.model, self.state, rule.side, rule.end);
        ruled(self.model, self.state).any(|rule| rule.absorbs && !off(&rule))
    }

    /// A formula as a constant that may be positive and is never negative.
    fn size(&self, e: Expr) -> Option<Expr> {
        let pool = &self.model.pool;
        let fits = |&c: &Expr| pool.sign(c).is_non_negative() && pool.sign(c) != Sign::Zero;
        let plain = self.constant(e).filter(fits);
        plain.or_else(|| self.constant(pool.in_exponentials(e)).filter(fits))
    }

    /// Whether the drift is `m coth(m u/s^2)`.
    fn is_cotangent(&self, drift: Expr, speed: Expr, square: Expr, forward: Expr) -> bool {
        let pool = &self.model.pool;
        let argument = pool.div(pool.mul(speed, forward), square);
        let expected = pool.div(speed, pool.call(Function::Tanh, &[argument]));
        pool.equal(drift, expected).is_yes() && sample::agree(pool, drift, expected)
    }
}
