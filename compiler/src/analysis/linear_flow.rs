//! Pairs of states moved by commuting linear flows: rotations, spirals and their relatives.
//!
//! For `dX = A X dt + sum_j B_j X dW_j` with matrices that commute the solution is the flow of the vector fields, each
//! followed for its time: `X(t + h) = exp(h (A - 1/2 sum_jk R_jk B_j B_k) + sum_j B_j (W_j(t + h) - W_j(t))) X(t)` (Kunita 1980;
//! Kloeden and Platen 1992, section 4.8). It reads the drivers' increments and nothing else, so that other states may
//! have the same drivers.
//!
//! Matrices of two rows commute if and only if all are combinations of the identity and of one matrix J without trace.
//! Then `exp(p I + q J) = e^p (cos(q) I + sin(q) J)` with J scaled so that `J^2 = -I`, with hyperbolic functions where
//! `J^2 = I`, and `e^p (I + q J)` where `J^2 = 0`. The map is proved by Ito's rule.

use std::collections::BTreeMap;

use super::dependence::sources;
use super::free::{Freedom, free_of};
use super::sample;
use crate::calculus::Dynamics;
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Bound, Expr, Function, Sign, Symbol, SymbolKind};

/// A matrix of two rows.
type Matrix = [[Expr; 2]; 2];

/// Two states and the map that moves them over a step.
#[derive(Clone, Debug)]
pub struct LinearFlow {
    /// The states, by their indices, ascending.
    pub states: [usize; 2],
    /// Their values after a step, in their values before, `length` and `increments`.
    pub next: [Expr; 2],
    /// The symbol of the step's length.
    pub length: Symbol,
    /// The drivers that move them, by index, each with the symbol of its increment.
    pub increments: Vec<(usize, Symbol)>,
    /// What the flow does.
    pub motion: Motion,
    /// The working.
    pub trace: Trace,
}

/// What a flow does, by the sign of the square of J.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Motion {
    /// It turns, and perhaps stretches: `J^2 = -I`.
    Rotation,
    /// It stretches in one direction and squeezes in another: `J^2 = I`.
    Hyperbolic,
    /// It shears: `J^2 = 0`.
    Shear,
}

/// The pairs among `free`, states that have no other exact law, ascending.
pub fn find(model: &Model, dynamics: &Dynamics, free: &[usize]) -> Vec<LinearFlow> {
    let mut found: Vec<LinearFlow> = Vec::new();
    for &first in free {
        let taken = |i: usize| found.iter().any(|flow| flow.states.contains(&i));
        if taken(first) {
            continue;
        }
        let mut partners = free.iter().filter(|&&i| i > first && !taken(i));
        let flow =
            partners.find_map(|&second| Pair::read(model, dynamics, [first, second])?.flow());
        found.extend(flow);
    }
    found
}

/// Two states with linear coefficients.
struct Pair<'a> {
    model: &'a Model,
    states: [usize; 2],
    drift: Matrix,
    /// By driver, those that move the states.
    noise: Vec<(usize, Matrix)>,
}

impl<'a> Pair<'a> {
    fn read(model: &'a Model, dynamics: &Dynamics, states: [usize; 2]) -> Option<Self> {
        let pool = &model.pool;
        let fits = |i: usize| {
            let declared = &model.states[i];
            let whole = [declared.domain.lower, declared.domain.upper] == [Bound::Infinite; 2];
            let own = sources(model, dynamics, i)
                .iter()
                .all(|j| states.contains(j));
            whole && own && declared.through.is_none()
        };
        let joined = |i: usize, j: usize| sources(model, dynamics, i).contains(&j);
        let [x, y] = states;
        if !(fits(x) && fits(y) && (joined(x, y) || joined(y, x))) {
            return None;
        }
        let read = |part: [Expr; 2]| linear(model, states, part);
        let drift = read(states.map(|i| dynamics.states[i].drift))?;
        let mut noise = Vec::new();
        for driver in 0..model.drivers.len() {
            let part = states.map(|i| dynamics.states[i].diffusion[driver]);
            if part.iter().any(|&b| !pool.is_zero_literal(b)) {
                noise.push((driver, read(part)?));
            }
        }
        let still = |&(j, _): &(usize, Matrix)| {
            let moves =
                |&(k, _): &(usize, Matrix)| pool.depends_on(model.correlation[j][k], model.time);
            !noise.iter().any(moves)
        };
        (!noise.is_empty() && noise.iter().all(still)).then_some(Self {
            model,
            states,
            drift,
            noise,
        })
    }

    /// `A - 1/2 sum_jk R_jk B_j B_k`, the drift of the equation in Stratonovich's form.
    fn stratonovich(&self) -> Matrix {
        let pool = &self.model.pool;
        let entry = |r: usize, c: usize| {
            let mut terms = vec![self.drift[r][c]];
            for &(j, left) in &self.noise {
                for &(k, right) in &self.noise {
                    let product = pool.add(
                        pool.mul(left[r][0], right[0][c]),
                        pool.mul(left[r][1], right[1][c]),
                    );
                    let rho = self.model.correlation[j][k];
                    terms.push(pool.product([pool.ratio(-1, 2), rho, product]));
                }
            }
            pool.simplify(pool.sum(terms))
        };
        [[entry(0, 0), entry(0, 1)], [entry(1, 0), entry(1, 1)]]
    }

    /// Half the trace of a matrix, and what is left of it.
    fn split(&self, m: Matrix) -> (Expr, Matrix) {
        let pool = &self.model.pool;
        let half = |e: Expr| pool.simplify(pool.mul(pool.ratio(1, 2), e));
        let growth = half(pool.add(m[0][0], m[1][1]));
        let beside = half(pool.sub(m[0][0], m[1][1]));
        (growth, [[beside, m[0][1]], [m[1][0], pool.neg(beside)]])
    }

    /// The flow, if all matrices are combinations of the identity and one other.
    fn flow(&self) -> Option<LinearFlow> {
        let pool = &self.model.pool;
        let drift = self.split(self.stratonovich());
        let noise: Vec<(Expr, Matrix)> = self.noise.iter().map(|&(_, b)| self.split(b)).collect();
        let all = || noise.iter().chain([&drift]).map(|&(_, rest)| rest);
        let generator =
            all().find(|rest| rest.iter().flatten().any(|&e| pool.is_zero(e).is_no()))?;
        let (motion, scale) = self.motion(generator)?;
        let unit = generator.map(|row| row.map(|e| pool.simplify(pool.div(e, scale))));
        let length = pool.symbol("step length", SymbolKind::Auxiliary);
        let mut turn = vec![pool.mul(self.multiple(drift.1, unit)?, pool.var(length))];
        let mut growth = vec![pool.mul(drift.0, pool.var(length))];
        let mut increments = Vec::new();
        for (&(driver, _), &(grown, rest)) in self.noise.iter().zip(&noise) {
            let name = format!("increment of {}", self.model.drivers[driver].name);
            let symbol = pool.symbol(&name, SymbolKind::Auxiliary);
            turn.push(pool.mul(self.multiple(rest, unit)?, pool.var(symbol)));
            growth.push(pool.mul(grown, pool.var(symbol)));
            increments.push((driver, symbol));
        }
        let next = self.map(motion, unit, pool.sum(growth), pool.sum(turn));
        let mut flow = LinearFlow {
            states: self.states,
            next,
            length,
            increments,
            motion,
            trace: Trace::default(),
        };
        self.prove(&mut flow)?;
        Some(flow)
    }

    /// What J does, and by what it is divided so that its square is one of three.
    fn motion(&self, generator: Matrix) -> Option<(Motion, Expr)> {
        let pool = &self.model.pool;
        let [[a, b], [c, _]] = generator;
        let square = pool.simplify(pool.add(pool.square(a), pool.mul(b, c)));
        match pool.sign(square) {
            Sign::Negative => Some((Motion::Rotation, pool.simplify(pool.sqrt(pool.neg(square))))),
            Sign::Positive => Some((Motion::Hyperbolic, pool.simplify(pool.sqrt(square)))),
            Sign::Zero => Some((Motion::Shear, pool.one())),
            _ => None,
        }
    }

    /// The factor by which a matrix without trace is a multiple of J.
    fn multiple(&self, rest: Matrix, unit: Matrix) -> Option<Expr> {
        let pool = &self.model.pool;
        let entries = || rest.iter().flatten().zip(unit.iter().flatten());
        let (&left, &right) = entries().find(|&(_, &u)| pool.is_zero(u).is_no())?;
        let factor = pool.simplify(pool.div(left, right));
        let same = |(&e, &u): (&Expr, &Expr)| pool.equal(e, pool.mul(factor, u)).is_yes();
        entries().all(same).then_some(factor)
    }

    /// `exp(growth I + turn J) X`.
    fn map(&self, motion: Motion, unit: Matrix, growth: Expr, turn: Expr) -> [Expr; 2] {
        let pool = &self.model.pool;
        let call = |f: Function| pool.call(f, &[turn]);
        let (along, across) = match motion {
            Motion::Rotation => (call(Function::Cos), call(Function::Sin)),
            Motion::Hyperbolic => (call(Function::Cosh), call(Function::Sinh)),
            Motion::Shear => (pool.one(), turn),
        };
        let x = self.states.map(|i| pool.var(self.model.states[i].symbol));
        let row = |r: usize| {
            let moved = pool.add(pool.mul(unit[r][0], x[0]), pool.mul(unit[r][1], x[1]));
            let turned = pool.add(pool.mul(along, x[r]), pool.mul(across, moved));
            pool.mul(pool.exp(growth), turned)
        };
        [row(0), row(1)]
    }

    /// Ito's rule on the map as a function of time and drivers: it starts at the identity, its noise is `B_j` times
    /// itself, its drift `A` times itself.
    fn prove(&self, flow: &mut LinearFlow) -> Option<()> {
        let pool = &self.model.pool;
        let applied = |m: &Matrix, r: usize| {
            pool.add(
                pool.mul(m[r][0], flow.next[0]),
                pool.mul(m[r][1], flow.next[1]),
            )
        };
        let none = flow
            .increments
            .iter()
            .map(|&(_, symbol)| (symbol, pool.zero()));
        let none: BTreeMap<Symbol, Expr> = none.chain([(flow.length, pool.zero())]).collect();
        let mut sides = Vec::new();
        for (r, &value) in flow.next.iter().enumerate() {
            let x = pool.var(self.model.states[self.states[r]].symbol);
            sides.push((pool.substitute(value, &none), x));
            let mut terms = vec![pool.derivative(value, flow.length)];
            for (&(j, first), (_, matrix)) in flow.increments.iter().zip(&self.noise) {
                let slope = pool.derivative(value, first);
                sides.push((slope, applied(matrix, r)));
                for &(k, second) in &flow.increments {
                    let rho = self.model.correlation[j][k];
                    let bend = pool.derivative(slope, second);
                    terms.push(pool.product([pool.ratio(1, 2), rho, bend]));
                }
            }
            sides.push((pool.sum(terms), applied(&self.drift, r)));
        }
        let holds = |&(left, right): &(Expr, Expr)| {
            pool.equal(left, right).is_yes() && sample::agree(pool, left, right)
        };
        if !sides.iter().all(holds) {
            return None;
        }
        for (&state, &value) in self.states.iter().zip(&flow.next) {
            let name = &self.model.states[state].name;
            let note = format!(
                "{name} after a step: Ito's rule gives this map the equation's drift and noise at all times, and it \
                 starts at {name}"
            );
            flow.trace.push("commuting flow", note, None, value);
        }
        Some(())
    }
}

/// The matrix of a part of the equation that is linear in the two states, free of time.
fn linear(model: &Model, states: [usize; 2], part: [Expr; 2]) -> Option<Matrix> {
    let pool = &model.pool;
    let symbols = states.map(|i| model.states[i].symbol);
    let entry = |e: Expr, along: Symbol| {
        let free = free_of(pool, pool.derivative(e, along), &symbols);
        match free {
            Freedom::Free(value) if !pool.depends_on(value, model.time) => Some(value),
            _ => None,
        }
    };
    let row = |e: Expr| {
        let [a, b] = [entry(e, symbols[0])?, entry(e, symbols[1])?];
        let whole = pool.add(
            pool.mul(a, pool.var(symbols[0])),
            pool.mul(b, pool.var(symbols[1])),
        );
        pool.equal(e, whole).is_yes().then_some([a, b])
    };
    Some([row(part[0])?, row(part[1])?])
}
