//! States that are square-root processes in some coordinate.
//!
//! A scalar diffusion `dX = a dt + b dW` belongs here if some monotone `y = U(x)` follows
//! `dy = (level - rate y) dt + s sqrt(y) dW` on the half line from 0: the square-root diffusion (Feller
//! 1951; Cox, Ingersoll and Ross 1985), and with it the constant-elasticity and three-halves equations,
//! Bessel processes and their squares, the radial Ornstein-Uhlenbeck process, and shifts, powers and
//! logarithms of these (Goeing-Jaeschke and Yor 2003 survey them). Given `y` now, `y` after a time `h` is
//! `c` times a noncentral chi-square variable of `dimension` degrees of freedom. The coefficients may depend on time
//! as long as the dimension does not: a change of time and scale leads to constant ones (Maghsoodi 1996).
//!
//! A candidate U is read off the noise (`candidates`); that it is one is then proved by Ito's rule and the
//! zero test, for all admissible parameters. What happens at `y = 0` is decided in `zero`.

mod candidates;
mod carried;
mod zero;

use super::coordinate::{Candidate, auxiliary};
use super::free::{Freedom, free_of};
use super::scalar::{Finding, Scalar};
use super::{assume, sample};
use crate::calculus::{Dynamics, Process, bracket, expand};
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Bound, Expr, Interval, Sign, Symbol};

pub use carried::{Carried, carried};
pub use zero::AtZero;

/// A state that is a square-root process in a coordinate.
#[derive(Clone, Debug)]
pub struct SquareRoot {
    /// The coordinate y.
    pub coordinate: Candidate,
    /// Its drift and diffusion by Ito's rule, in the state.
    pub process: Process,
    /// `level` in `dy = (level - rate y) dt + s sqrt(y) dW`.
    pub level: Expr,
    /// `rate` there; of any sign.
    pub rate: Expr,
    /// `s^2` there.
    pub square: Expr,
    /// Degrees of freedom of the transition, `4 level/s^2`.
    pub dimension: Expr,
    /// Whether `level`, `rate` or `s` depends on time.
    pub moving: bool,
    /// What happens at `y = 0`.
    pub at_zero: AtZero,
    /// Whether `y = 0` is an open end of the domain that may be reached, so that paths stop there and count
    /// as having left.
    pub leaves: bool,
    /// The working.
    pub trace: Trace,
}

impl SquareRoot {
    /// The sign of `dimension - n`, from ranges and assumptions.
    pub fn dimension_against(&self, model: &Model, n: i64) -> Sign {
        against(model, self.level, self.square, n)
    }

    /// Whether the transition has an atom; none where that hangs on the parameters' values, and where the
    /// process leaves its domain, since what is derived holds until then. At dimension 0
    /// the noncentral chi-square law itself has one (Siegel 1979) and counts as without.
    pub fn has_atom(&self, model: &Model) -> Option<bool> {
        match self.at_zero {
            AtZero::NotReached => Some(false),
            AtZero::Reflected => {
                let reflected = self.dimension_against(model, 0).is_non_negative();
                reflected.then_some(false)
            }
            AtZero::Absorbed if model.pool.is_zero_literal(self.level) => Some(false),
            AtZero::Absorbed => {
                let reached = self.dimension_against(model, 2) == Sign::Negative;
                (reached && !self.leaves).then_some(true)
            }
        }
    }

    /// The coefficients of the Brownian motion B of `s sqrt(y) dB` in the drivers' increments, one per driver; none
    /// where the noise may vanish for some parameters.
    pub fn unit(&self, model: &Model) -> Option<Vec<Expr>> {
        let pool = &model.pool;
        if !pool.sign(self.square).is_positive() {
            return None;
        }
        let root = pool.sqrt(pool.mul(self.square, self.coordinate.forward));
        let symbols: Vec<Symbol> = model.states.iter().map(|s| s.symbol).collect();
        let noise = self.process.diffusion.iter();
        noise
            .map(|&b| match free_of(pool, pool.div(b, root), &symbols) {
                Freedom::Free(value) => Some(value),
                Freedom::DependsOn(_) | Freedom::CannotTell(_) => None,
            })
            .collect()
    }
}

/// `4 level - n s^2`, which has the sign of `dimension - n`.
fn margin(model: &Model, level: Expr, square: Expr, n: i64) -> Expr {
    let pool = &model.pool;
    pool.simplify(pool.sub(pool.mul(pool.int(4), level), pool.mul(pool.int(n), square)))
}

/// The sign of `dimension - n`: of the margin, or of the difference itself, which may be the simpler formula.
fn against(model: &Model, level: Expr, square: Expr, n: i64) -> Sign {
    let pool = &model.pool;
    let margin = assume::sign(model, margin(model, level, square, n));
    if margin != Sign::Unknown {
        return margin;
    }
    let dimension = pool.div(pool.mul(pool.int(4), level), square);
    assume::sign(model, pool.simplify(pool.sub(dimension, pool.int(n))))
}

/// Looks for a coordinate in which a state is a square-root process by itself.
///
/// Whether other states share its noise is another question: see [`entangled`](super::scalar::entangled).
pub fn find(model: &Model, dynamics: &Dynamics, state: usize) -> Finding<SquareRoot> {
    let Some(scalar) = Scalar::read_moving(model, dynamics, state) else {
        return Finding::Other;
    };
    let mut found = candidates::candidates(&scalar)
        .into_iter()
        .filter_map(|candidate| scalar.prove(dynamics, candidate));
    let Some(proved) = found.next() else {
        return Finding::Other;
    };
    if let Some(reason) =
        scalar.other_coordinate(proved.coordinate.forward, "a square-root process")
    {
        return Finding::Refused(reason);
    }
    if let Some(reason) = scalar.moving_dimension(&proved) {
        return Finding::Refused(reason);
    }
    match zero::settle(&scalar, &proved) {
        Ok((at_zero, leaves)) => Finding::Law(Box::new(SquareRoot {
            moving: [proved.level, proved.rate, proved.square]
                .into_iter()
                .any(|e| scalar.moves(e)),
            at_zero,
            leaves,
            coordinate: proved.coordinate,
            process: proved.process,
            level: proved.level,
            rate: proved.rate,
            square: proved.square,
            dimension: proved.dimension,
            trace: proved.trace,
        })),
        Err(reason) => Finding::Refused(reason),
    }
}

impl Scalar<'_> {
    /// Proves that a candidate follows a square-root equation, by Ito's rule and the zero test.
    fn prove(&self, dynamics: &Dynamics, coordinate: Candidate) -> Option<Proved> {
        let (model, pool) = (self.model, &self.model.pool);
        let y = coordinate.forward;
        if self.moves(y) || !self.onto_half_line(y) {
            return None;
        }
        let mut expansion = expand(model, &dynamics.states, y);
        let spread = bracket(model, &expansion.diffusion, &expansion.diffusion);
        let square = self.constant(pool.div(spread, y))?;
        let along = pool.derivative(y, model.states[self.state].symbol);
        let slope = pool.derivative(expansion.drift, model.states[self.state].symbol);
        let rate = self.constant(pool.neg(pool.div(slope, along)))?;
        let level = self.constant(pool.add(expansion.drift, pool.mul(rate, y)))?;
        let drift = pool.sub(level, pool.mul(rate, y));
        let sides = [(expansion.drift, drift), (spread, pool.mul(square, y))];
        let holds = |&(left, right): &(Expr, Expr)| {
            left == right || (pool.equal(left, right).is_yes() && sample::agree(pool, left, right))
        };
        if !sides.iter().all(holds) || !pool.sign(square).is_non_negative() {
            return None;
        }
        let dimension = pool.simplify(pool.div(pool.mul(pool.int(4), level), square));
        let dimension = match free_of(pool, dimension, &[model.time]) {
            Freedom::Free(constant) => constant,
            Freedom::DependsOn(_) | Freedom::CannotTell(_) => dimension,
        };
        let trace = &mut expansion.trace;
        let note = "drift of the coordinate as a linear function of it";
        trace.push("square-root form", note, Some(expansion.drift), drift);
        let note = "square of its noise as a multiple of it";
        trace.push("square-root form", note, Some(spread), pool.mul(square, y));
        Some(Proved {
            process: Process {
                drift: expansion.drift,
                diffusion: expansion.diffusion,
            },
            trace: expansion.trace,
            coordinate,
            level,
            rate,
            square,
            dimension,
        })
    }

    /// Why there is no law where the dimension depends on time.
    fn moving_dimension(&self, proved: &Proved) -> Option<String> {
        if !self.moves(proved.dimension) {
            return None;
        }
        let pool = &self.model.pool;
        Some(format!(
            "{} is a square-root process whose dimension {} depends on time: no transition of such a process is known \
             in closed form",
            pool.format(proved.coordinate.forward),
            pool.format(proved.dimension)
        ))
    }
}

/// Coordinates in which a state's noise may be constant: the roots of those in which it may be that of a square-root
/// process (Lamperti's transform, from the right constant on).
pub fn lamperti(model: &Model, dynamics: &Dynamics, state: usize) -> Vec<Candidate> {
    let pool = &model.pool;
    let Some(scalar) = Scalar::read(model, dynamics, state) else {
        return Vec::new();
    };
    let symbol = auxiliary(pool, &model.states[state].name);
    let from_zero = Interval {
        lower: Bound::Closed(pool.zero()),
        upper: Bound::Infinite,
    };
    pool.set_ranges([(symbol, from_zero)]);
    let root = |c: Candidate| {
        let square = [(c.symbol, pool.square(pool.var(symbol)))]
            .into_iter()
            .collect();
        Candidate {
            symbol,
            forward: pool.simplify(pool.sqrt(c.forward)),
            inverse: pool.simplify(pool.substitute(c.inverse, &square)),
            onto_line: false,
        }
    };
    let found = candidates::candidates(&scalar).into_iter();
    found.map(root).collect()
}

/// A candidate that has passed Ito's rule.
struct Proved {
    coordinate: Candidate,
    process: Process,
    level: Expr,
    rate: Expr,
    square: Expr,
    dimension: Expr,
    trace: Trace,
}
