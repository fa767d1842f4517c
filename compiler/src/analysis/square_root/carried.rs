//! States that a square-root process carries along.
//!
//! With `dy = (level - rate y) dt + s sqrt(y) dB` a state may follow, in a coordinate u,
//!
//! `du = (free + along y) dt + sqrt(y) (shared dB + dR)`
//!
//! with `along`, `shared` and the Brownian motions `R`, independent of `B`, free of states and time: the logarithm of a
//! price whose variance is y (Heston 1993), the integral of y, several prices with one variance. Given y
//! at both ends of a step and its integral in between, `int sqrt(y) dB = (y(t+h) - y(t) - level h + rate int y)/s`, and the
//! coordinate is normal (Broadie and Kaya 2006, section 3; Andersen 2008, section 4).

use super::SquareRoot;
use crate::analysis::coordinate::{Candidate, candidates, through};
use crate::analysis::dependence::mentioned;
use crate::analysis::free::{Freedom, free_of, kink_in};
use crate::analysis::sample;
use crate::calculus::{Dynamics, Process, bracket, expand};
use crate::model::{AtEdge, Model};
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Symbol};

/// A state in the coordinate in which it is carried.
#[derive(Clone, Debug)]
pub struct Carried {
    /// The coordinate u.
    pub coordinate: Candidate,
    /// Its drift and diffusion by Ito's rule, in the states.
    pub process: Process,
    /// Its drift less `along y`, in the states other than y's.
    pub free: Expr,
    /// How its drift changes with y.
    pub along: Expr,
    /// Its noise in common with y, as a multiple of `sqrt(y) dB`.
    pub shared: Expr,
    /// The rest of its noise: coefficients of `sqrt(y) dW_j`, one per driver, together independent of B.
    pub rest: Vec<Expr>,
    /// The variance rate of that, as a multiple of y.
    pub rest_square: Expr,
    /// Whether `exp(u)` grows at the rate `free` in the mean, which a step can keep exactly.
    pub grows_freely: bool,
    /// The working.
    pub trace: Trace,
}

/// The coordinate in which a square-root process carries a state, if there is one.
pub fn carried(
    model: &Model,
    dynamics: &Dynamics,
    carrier: usize,
    law: &SquareRoot,
    state: usize,
) -> Option<Carried> {
    let declared = &model.states[state];
    let ruled = |rule: Option<AtEdge>| matches!(rule, Some(AtEdge::Absorb | AtEdge::Reflect));
    let own = &dynamics.states[state];
    let reads = |e: Expr| mentioned(model, e).contains(&carrier);
    let touched = reads(own.drift) || own.diffusion.iter().any(|&b| reads(b));
    if !touched || ruled(declared.at_lower) || ruled(declared.at_upper) {
        return None;
    }
    let search = Search {
        model,
        dynamics,
        carrier,
        law,
        fixed: model
            .states
            .iter()
            .map(|s| s.symbol)
            .chain([model.time])
            .collect(),
    };
    let tried = match &declared.through {
        Some(_) => through(model, declared).into_iter().collect(),
        None => candidates(model, declared, None),
    };
    tried
        .into_iter()
        .filter(|candidate| candidate.onto_line)
        .find_map(|candidate| search.prove(state, candidate))
}

struct Search<'a> {
    model: &'a Model,
    dynamics: &'a Dynamics,
    carrier: usize,
    law: &'a SquareRoot,
    /// What coefficients must be free of: the states and time.
    fixed: Vec<Symbol>,
}

impl Search<'_> {
    fn constant(&self, e: Expr) -> Option<Expr> {
        match free_of(&self.model.pool, e, &self.fixed) {
            Freedom::Free(value) => Some(value),
            Freedom::DependsOn(_) | Freedom::CannotTell(_) => None,
        }
    }

    /// Per driver, the coefficient of `sqrt(y) dW_j`.
    fn over_root(&self, noise: &[Expr]) -> Option<Vec<Expr>> {
        let pool = &self.model.pool;
        let root = pool.sqrt(self.law.coordinate.forward);
        noise
            .iter()
            .map(|&b| self.constant(pool.div(b, root)))
            .collect()
    }

    fn prove(&self, state: usize, coordinate: Candidate) -> Option<Carried> {
        let (model, pool) = (self.model, &self.model.pool);
        let y = self.law.coordinate.forward;
        let x = model.states[self.carrier].symbol;
        let mut expansion = expand(model, &self.dynamics.states, coordinate.forward);
        let noise = self.over_root(&expansion.diffusion)?;
        if kink_in(pool, expansion.drift, &[x]).is_some() {
            return None;
        }
        let slope = pool.derivative(expansion.drift, x);
        let along = self.constant(pool.div(slope, pool.derivative(y, x)))?;
        let free = match free_of(pool, pool.sub(expansion.drift, pool.mul(along, y)), &[x]) {
            Freedom::Free(value) => value,
            Freedom::DependsOn(_) | Freedom::CannotTell(_) => return None,
        };
        let unit = self.unit()?;
        let shared = self.constant(bracket(model, &noise, &unit))?;
        let rest: Vec<Expr> = noise
            .iter()
            .zip(&unit)
            .map(|(&g, &b)| pool.simplify(pool.sub(g, pool.mul(shared, b))))
            .collect();
        let rest_square = self.constant(bracket(model, &rest, &rest))?;
        let drift = pool.add(free, pool.mul(along, y));
        if !self.holds(expansion.drift, drift) || !self.independent(&rest, &unit) {
            return None;
        }
        let total = pool.add(pool.square(shared), rest_square);
        let excess = pool.add(along, pool.mul(pool.ratio(1, 2), total));
        let trace = &mut expansion.trace;
        let name = &model.states[state].name;
        let variance = &model.states[self.carrier].name;
        let lines = [
            (
                format!("drift of the coordinate of {name} as a linear function of {variance}"),
                Some(expansion.drift),
                drift,
            ),
            (
                format!(
                    "its noise in common with {variance}, as a multiple of sqrt({variance}) dB"
                ),
                None,
                shared,
            ),
            (
                format!("variance rate of the rest of its noise, as a multiple of {variance}"),
                None,
                rest_square,
            ),
        ];
        for (note, before, after) in lines {
            trace.push("conditional law", note, before, after);
        }
        Some(Carried {
            grows_freely: self.is_exponential(&coordinate) && pool.is_zero(excess).is_yes(),
            process: Process {
                drift: expansion.drift,
                diffusion: expansion.diffusion,
            },
            trace: expansion.trace,
            coordinate,
            free,
            along,
            shared,
            rest,
            rest_square,
        })
    }

    /// The coefficients of `dB` in the drivers' increments.
    fn unit(&self) -> Option<Vec<Expr>> {
        self.law.unit(self.model)
    }

    fn holds(&self, left: Expr, right: Expr) -> bool {
        let pool = &self.model.pool;
        left == right || (pool.equal(left, right).is_yes() && sample::agree(pool, left, right))
    }

    fn independent(&self, rest: &[Expr], unit: &[Expr]) -> bool {
        let pool = &self.model.pool;
        pool.is_zero(bracket(self.model, rest, unit)).is_yes()
    }

    /// Whether the state is an exponential of the coordinate, up to a shift.
    fn is_exponential(&self, coordinate: &Candidate) -> bool {
        let pool = &self.model.pool;
        let u = pool.var(coordinate.symbol);
        let slope = pool.derivative(coordinate.inverse, coordinate.symbol);
        !coordinate.is_identity() && self.constant(pool.div(slope, pool.exp(u))).is_some()
    }
}
