//! Moment equations: the generator on a space of functions that it maps to itself.
//!
//! `d/dt E[f] = E[L f]` for each function `f` of the space; where the generator takes `f` to a
//! combination of `f` itself and of functions already solved, variation of constants gives the mean in
//! closed form. On polynomials of a model with drifts of degree 1 and variance rates of degree 2 the
//! space closes (Cuchiero, Keller-Ressel and Teichmann 2012, "Polynomial processes and their
//! applications to mathematical finance", Finance and Stochastics 16). The functions here are whatever
//! products of states come out of Ito's rule, so logarithms and powers close too where they can.

use std::cell::{Cell, RefCell};
use std::collections::BTreeMap;

use driftwright_runtime::gauss::{linear_transition, moving_transition};

use super::exp_poly::{ExpPoly, factors, summands};
use super::integrability::martingale_part;
use crate::calculus::System;
use crate::symbolic::{Expr, Limit, Symbol};

/// A function space is given up on in which a function needs a longer chain of others.
const DEEPEST: usize = 40;
/// And one whose generator has more terms.
const MOST_TERMS: usize = 200;
/// And one whose solution takes more products of terms: a second of work, and a formula that fills books.
const MOST_PRODUCTS: usize = 3_000;
/// And one of more functions whose generator depends on time, when numbers are wanted.
const MOST_MOVING: usize = 20;

/// The equations of one system, solved on demand.
pub(super) struct Equations<'a> {
    system: System<'a>,
    /// Values of the coordinates at time 0.
    start: BTreeMap<Symbol, Expr>,
    known: RefCell<BTreeMap<Expr, Option<ExpPoly>>>,
    /// Products of terms that the present question has taken.
    products: Cell<usize>,
}

/// A combination of functions of the coordinates; coefficients hold time and parameters.
type Combination = BTreeMap<Expr, Expr>;

impl<'a> Equations<'a> {
    pub(super) fn new(system: System<'a>, start: BTreeMap<Symbol, Expr>) -> Self {
        Self {
            system,
            start,
            known: RefCell::default(),
            products: Cell::default(),
        }
    }

    /// `E[formula]` at time t, in closed form.
    pub(super) fn mean(&self, formula: Expr) -> Option<Expr> {
        let pool = self.system.pool();
        self.products.set(0);
        let parts = self.split(formula)?;
        let mut terms = Vec::new();
        for (function, coefficient) in parts {
            let mean = self
                .solve(function, 0)?
                .formula(pool, self.system.model.time);
            terms.push(pool.mul(coefficient, mean));
        }
        Some(pool.sum(terms))
    }

    /// `E[formula]` at time `t` as a number, by solving the equations of the whole function space at once, so that it needs no order of solving and no two rates apart.
    pub(super) fn number(
        &self,
        formula: Expr,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        let pool = self.system.pool();
        let parts = self.split(formula)?;
        let mut basis: Vec<Expr> = parts.keys().copied().collect();
        let mut entries = Vec::new();
        let mut next = 0;
        while next < basis.len() {
            for (function, coefficient) in self.generator(basis[next])? {
                let column = basis
                    .iter()
                    .position(|&f| f == function)
                    .unwrap_or_else(|| {
                        basis.push(function);
                        basis.len() - 1
                    });
                entries.push((next, column, coefficient));
            }
            next += 1;
            if basis.len() as u64 > Limit::Moments.amount() {
                pool.exceed(Limit::Moments);
                return None;
            }
        }
        let means = self.propagate(&basis, &entries, values, t)?;
        let mut at = values.clone();
        at.insert(self.system.model.time, t);
        let terms = parts
            .iter()
            .zip(means)
            .map(|((_, &c), m)| Some(pool.eval_f64(c, &at)? * m));
        terms.sum()
    }

    /// The solution of `m' = M m` at time `t` from the functions' values at time 0: by the matrix exponential or, where
    /// the generator depends on time, by integration.
    fn propagate(
        &self,
        basis: &[Expr],
        entries: &[(usize, usize, Expr)],
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<Vec<f64>> {
        let (n, pool, time) = (basis.len(), self.system.pool(), self.system.model.time);
        let moving = entries.iter().any(|&(.., c)| pool.depends_on(c, time));
        if moving && n > MOST_MOVING {
            pool.exceed(Limit::Moments);
            return None;
        }
        let matrix = |at: &BTreeMap<Symbol, f64>, out: &mut [f64]| {
            out.fill(0.0);
            for &(row, column, coefficient) in entries {
                out[row * n + column] += pool.eval_f64(coefficient, at).unwrap_or(f64::NAN);
            }
        };
        let (zeros, none) = (vec![0.0; n], vec![0.0; n * n]);
        let (mut e, mut shift, mut spread) = (vec![0.0; n * n], vec![0.0; n], vec![0.0; n * n]);
        if moving {
            let evaluate = |instant: f64, out: &mut [f64]| {
                let mut at = values.clone();
                at.insert(time, instant);
                out.fill(0.0);
                matrix(&at, &mut out[..n * n]);
            };
            moving_transition(n, 0.0, t, evaluate, &mut e, &mut shift, &mut spread).ok()?;
        } else {
            let mut still = vec![0.0; n * n];
            matrix(values, &mut still);
            linear_transition(n, &still, &zeros, &none, t, &mut e, &mut shift, &mut spread).ok()?;
        }
        let start: Option<Vec<f64>> = basis
            .iter()
            .map(|&f| {
                self.system
                    .pool()
                    .eval_f64(self.system.pool().substitute(f, &self.start), values)
            })
            .collect();
        let start = start?;
        Some(
            (0..n)
                .map(|row| (0..n).map(|k| e[row * n + k] * start[k]).sum())
                .collect(),
        )
    }

    /// The mean of one function of the coordinates.
    fn solve(&self, function: Expr, depth: usize) -> Option<ExpPoly> {
        let pool = self.system.pool();
        if self.system.occurring(function).is_empty() {
            return Some(ExpPoly::constant(pool, function));
        }
        if let Some(known) = self.known.borrow().get(&function) {
            return known.clone();
        }
        let functions = self.known.borrow().len() as u64;
        if depth > DEEPEST || functions > Limit::Moments.amount() {
            self.system.pool().exceed(Limit::Moments);
            return None;
        }
        // Whoever needs this function in order to solve it has found a cycle, and gets "none".
        self.known.borrow_mut().insert(function, None);
        let found = self.solve_new(function, depth);
        self.known.borrow_mut().insert(function, found.clone());
        found
    }

    fn solve_new(&self, function: Expr, depth: usize) -> Option<ExpPoly> {
        let pool = self.system.pool();
        let time = self.system.model.time;
        let mut rate = pool.zero();
        let mut forcing = ExpPoly::default();
        for (other, coefficient) in self.generator(function)? {
            if other == function {
                rate = coefficient;
            } else {
                let coefficient = ExpPoly::read(pool, time, coefficient)?;
                let mean = self.solve(other, depth + 1)?;
                self.spend(coefficient.terms() * mean.terms())?;
                forcing.add_product(pool, &coefficient, &mean);
            }
        }
        if pool.depends_on(rate, time) {
            return None;
        }
        let start = pool.simplify(pool.substitute(function, &self.start));
        ExpPoly::solve(pool, rate, &forcing, start)
    }

    /// Takes so many products of terms from the budget of the present question.
    fn spend(&self, products: usize) -> Option<()> {
        self.products.set(self.products.get() + products);
        if self.products.get() > MOST_PRODUCTS {
            self.system.pool().exceed(Limit::Moments);
            return None;
        }
        Some(())
    }

    /// The generator on a function, taken apart; none where the mean may not be taken.
    fn generator(&self, function: Expr) -> Option<Combination> {
        if self.system.occurring(function).is_empty() {
            return Some(Combination::new());
        }
        // Ito's rule lacks a local-time term where a formula has a kink.
        if self.system.pool().has_kink(function).is_some() {
            return None;
        }
        martingale_part(&self.system, function)?;
        self.split(self.system.generator(function))
    }

    /// A formula as a combination of functions of the coordinates.
    fn split(&self, formula: Expr) -> Option<Combination> {
        let pool = self.system.pool();
        let terms = summands(pool, pool.expand(formula));
        if terms.len() > MOST_TERMS {
            pool.exceed(Limit::Moments);
            return None;
        }
        let mut parts = Combination::new();
        for term in terms {
            let (moving, fixed): (Vec<Expr>, Vec<Expr>) = factors(pool, term)
                .into_iter()
                .partition(|&f| !self.system.occurring(f).is_empty());
            let function = pool.product(moving);
            // Time belongs to the coefficients: a function that mixes it with states is not one of ours.
            if pool.depends_on(function, self.system.model.time) {
                return None;
            }
            let coefficient = parts.entry(function).or_insert_with(|| pool.zero());
            *coefficient = pool.add(*coefficient, pool.product(fixed));
        }
        parts.retain(|_, c| !pool.is_zero_literal(pool.expand(*c)));
        Some(parts)
    }
}
