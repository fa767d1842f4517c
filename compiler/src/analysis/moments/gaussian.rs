//! Mean vector and covariance matrix of a linear Gaussian system, as formulas in time and parameters.
//!
//! For `du = (a u + alpha) dt + c dW` with `d<W_j, W_k> = R_jk dt` the means obey `m' = a m + alpha`
//! and the covariances `P' = a P + P a' + c R c'` (Arnold 1974, "Stochastic Differential Equations",
//! section 8.2). Both are solved row by row by variation of constants where the rows can be put in
//! an order in which each depends on earlier ones only, and as numbers in any case.

use std::cell::RefCell;
use std::collections::BTreeMap;

use driftwright_runtime::gauss::{linear_transition, moving_transition};

use super::exp_poly::ExpPoly;
use crate::calculus::bracket;
use crate::model::Model;
use crate::symbolic::{Expr, Pool, Symbol, SymbolKind};

/// One coordinate of a linear Gaussian system.
#[derive(Clone, Debug)]
pub(super) struct GaussianRow {
    /// The state it stands for, by its index in the model.
    pub(super) state: usize,
    /// The coordinate's symbol: the state's own where they are the same.
    pub(super) symbol: Symbol,
    /// The coordinate in the state.
    pub(super) forward: Expr,
    /// The state in the coordinate.
    pub(super) inverse: Expr,
    /// Coefficients of the drift: (position of the row, coefficient), zero where not named.
    pub(super) a: Vec<(usize, Expr)>,
    /// The constant part of the drift.
    pub(super) alpha: Expr,
    /// Coefficients of the drivers' increments, one per driver.
    pub(super) c: Vec<Expr>,
}

/// What is known of one mean or covariance.
#[derive(Clone, Debug)]
enum Slot {
    /// It is being worked out: whoever asks again has found a cycle.
    Pending,
    /// The closed form, or none.
    Done(Option<ExpPoly>),
}

/// A linear Gaussian system with its moments, worked out on demand.
#[derive(Debug)]
pub(super) struct Gaussian {
    pub(super) rows: Vec<GaussianRow>,
    means: RefCell<BTreeMap<usize, Slot>>,
    covariances: RefCell<BTreeMap<(usize, usize), Slot>>,
}

impl Gaussian {
    pub(super) fn new(rows: Vec<GaussianRow>) -> Self {
        Self {
            rows,
            means: RefCell::default(),
            covariances: RefCell::default(),
        }
    }

    /// The row of a coordinate's symbol.
    pub(super) fn position(&self, symbol: Symbol) -> Option<usize> {
        self.rows.iter().position(|row| row.symbol == symbol)
    }

    /// The coordinate's value at time 0, in the parameters.
    pub(super) fn start(&self, model: &Model, i: usize) -> Expr {
        let row = &self.rows[i];
        let state = &model.states[row.state];
        let at = BTreeMap::from([
            (state.symbol, state.initial.expr),
            (model.time, model.pool.zero()),
        ]);
        model.pool.simplify(model.pool.substitute(row.forward, &at))
    }

    /// `E[u_i(t)]` in time and parameters.
    pub(super) fn mean(&self, model: &Model, i: usize) -> Option<Expr> {
        self.mean_terms(model, i)
            .map(|terms| terms.formula(&model.pool, model.time))
    }

    /// `Cov[u_i(t), u_j(t)]` in time and parameters.
    pub(super) fn covariance(&self, model: &Model, i: usize, j: usize) -> Option<Expr> {
        self.covariance_terms(model, i, j)
            .map(|terms| terms.formula(&model.pool, model.time))
    }

    fn mean_terms(&self, model: &Model, i: usize) -> Option<ExpPoly> {
        match self.means.borrow().get(&i) {
            Some(Slot::Done(known)) => return known.clone(),
            Some(Slot::Pending) => return None,
            None => {}
        }
        self.means.borrow_mut().insert(i, Slot::Pending);
        let found = self.solve_mean(model, i);
        self.means.borrow_mut().insert(i, Slot::Done(found.clone()));
        found
    }

    fn solve_mean(&self, model: &Model, i: usize) -> Option<ExpPoly> {
        let pool = &model.pool;
        let row = &self.rows[i];
        let mut forcing = ExpPoly::read(pool, model.time, row.alpha)?;
        for &(k, coefficient) in row.a.iter().filter(|&&(k, _)| k != i) {
            let coefficient = ExpPoly::read(pool, model.time, coefficient)?;
            forcing.add_product(pool, &coefficient, &self.mean_terms(model, k)?);
        }
        ExpPoly::solve(
            pool,
            self.own_rate(model, i)?,
            &forcing,
            self.start(model, i),
        )
    }

    fn covariance_terms(&self, model: &Model, i: usize, j: usize) -> Option<ExpPoly> {
        let key = (i.min(j), i.max(j));
        match self.covariances.borrow().get(&key) {
            Some(Slot::Done(known)) => return known.clone(),
            Some(Slot::Pending) => return None,
            None => {}
        }
        self.covariances.borrow_mut().insert(key, Slot::Pending);
        let found = self.solve_covariance(model, key.0, key.1);
        self.covariances
            .borrow_mut()
            .insert(key, Slot::Done(found.clone()));
        found
    }

    fn solve_covariance(&self, model: &Model, i: usize, j: usize) -> Option<ExpPoly> {
        let pool = &model.pool;
        let rate = bracket(model, &self.rows[i].c, &self.rows[j].c);
        let mut forcing = ExpPoly::read(pool, model.time, pool.simplify(rate))?;
        for (row, other) in [(i, j), (j, i)] {
            for &(k, coefficient) in self.rows[row].a.iter().filter(|&&(k, _)| k != row) {
                let coefficient = ExpPoly::read(pool, model.time, coefficient)?;
                forcing.add_product(pool, &coefficient, &self.covariance_terms(model, k, other)?);
            }
        }
        let rate = pool.add(self.own_rate(model, i)?, self.own_rate(model, j)?);
        ExpPoly::solve(pool, rate, &forcing, pool.zero())
    }

    /// The diagonal entry of `a`; none where it depends on time.
    fn own_rate(&self, model: &Model, i: usize) -> Option<Expr> {
        let own = self.rows[i].a.iter().filter(|&&(k, _)| k == i);
        let rate = model.pool.sum(own.map(|&(_, a)| a).collect::<Vec<_>>());
        (!model.pool.depends_on(rate, model.time)).then_some(rate)
    }

    /// The rows that the given ones depend on, themselves included, ascending.
    fn closure(&self, rows: &[usize]) -> Vec<usize> {
        let mut reached = vec![false; self.rows.len()];
        let mut pending = rows.to_vec();
        while let Some(i) = pending.pop() {
            if !std::mem::replace(&mut reached[i], true) {
                pending.extend(self.rows[i].a.iter().map(|&(k, _)| k));
            }
        }
        (0..reached.len()).filter(|&i| reached[i]).collect()
    }

    /// Whether no noise reaches the row.
    pub(super) fn is_deterministic(&self, pool: &Pool, i: usize) -> bool {
        let quiet = |&k: &usize| self.rows[k].c.iter().all(|&c| pool.is_zero_literal(c));
        self.closure(&[i]).iter().all(quiet)
    }

    /// Means and covariances of the given rows at time `t` as numbers, by the matrix exponential or, where
    /// coefficients depend on time, by integrating them; the values are keyed by the stand-in symbols of
    /// [`mean_symbol`] and [`covariance_symbol`].
    pub(super) fn numbers(
        &self,
        model: &Model,
        rows: &[usize],
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<BTreeMap<Symbol, f64>> {
        let pool = &model.pool;
        let closure = self.closure(rows);
        let n = closure.len();
        let formulas = self.coefficients(model, &closure)?;
        let (mut e, mut shift, mut spread) = (vec![0.0; n * n], vec![0.0; n], vec![0.0; n * n]);
        if formulas.iter().any(|&f| pool.depends_on(f, model.time)) {
            let evaluate = |instant: f64, out: &mut [f64]| {
                let mut at = values.clone();
                at.insert(model.time, instant);
                for (out, &formula) in out.iter_mut().zip(&formulas) {
                    *out = pool.eval_f64(formula, &at).unwrap_or(f64::NAN);
                }
            };
            moving_transition(n, 0.0, t, evaluate, &mut e, &mut shift, &mut spread).ok()?;
        } else {
            let number = |&f: &Expr| pool.eval_f64(f, values);
            let numbers = formulas.iter().map(number).collect::<Option<Vec<f64>>>()?;
            let (a, rest) = numbers.split_at(n * n);
            let (alpha, q) = rest.split_at(n);
            linear_transition(n, a, alpha, q, t, &mut e, &mut shift, &mut spread).ok()?;
        }
        let start = closure
            .iter()
            .map(|&i| pool.eval_f64(self.start(model, i), values));
        let start = start.collect::<Option<Vec<f64>>>()?;
        let mut found = BTreeMap::new();
        for (r, &i) in closure.iter().enumerate() {
            let moved: f64 = (0..n).map(|s| e[r * n + s] * start[s]).sum();
            found.insert(mean_symbol(pool, &self.rows[i]), moved + shift[r]);
            for (s, &j) in closure.iter().enumerate().skip(r) {
                let symbol = covariance_symbol(pool, &self.rows[i], &self.rows[j]);
                found.insert(symbol, spread[r * n + s]);
            }
        }
        Some(found)
    }

    /// `a`, `alpha` and `c R c'` of the given rows, one after the other.
    fn coefficients(&self, model: &Model, closure: &[usize]) -> Option<Vec<Expr>> {
        let (pool, n) = (&model.pool, closure.len());
        let mut a = vec![pool.zero(); n * n];
        for (r, &i) in closure.iter().enumerate() {
            for &(k, coefficient) in &self.rows[i].a {
                let place = r * n + closure.binary_search(&k).ok()?;
                a[place] = pool.add(a[place], coefficient);
            }
        }
        let alpha = closure.iter().map(|&i| self.rows[i].alpha);
        let pairs = closure
            .iter()
            .flat_map(|&i| closure.iter().map(move |&j| (i, j)));
        let rates = pairs.map(|(i, j)| bracket(model, &self.rows[i].c, &self.rows[j].c));
        Some(a.into_iter().chain(alpha).chain(rates).collect())
    }
}

/// The symbol that stands for the mean of a coordinate until its value is put in. No name in a model
/// file can contain a bracket.
pub(super) fn mean_symbol(pool: &Pool, row: &GaussianRow) -> Symbol {
    pool.symbol(
        &format!("E[{}]", pool.symbol_name(row.symbol)),
        SymbolKind::Auxiliary,
    )
}

/// The symbol that stands for the covariance of two coordinates, in the order of the rows.
pub(super) fn covariance_symbol(pool: &Pool, one: &GaussianRow, other: &GaussianRow) -> Symbol {
    let (a, b) = (pool.symbol_name(one.symbol), pool.symbol_name(other.symbol));
    pool.symbol(&format!("Cov[{a}, {b}]"), SymbolKind::Auxiliary)
}
