//! Expectations of `sum polynomial * exp(linear)` of a Gaussian vector.
//!
//! With `u ~ N(m, P)` exponential tilting gives
//! `E[p(u) exp(l.u)] = exp(l.m + l'P l/2) E[p(v)]`, `v ~ N(m + P l, P)`, and the moments of `v` follow
//! from Isserlis's theorem (Isserlis 1918) in its recursive form
//! `E[v_i g(v)] = E[v_i] E[g] + sum_j P_ij E[dg/dv_j]`.

use std::collections::BTreeMap;

use super::affine::affine;
use super::exp_poly::{exponent_of, factors, small_power, summands};
use super::gaussian::{Gaussian, covariance_symbol, mean_symbol};
use crate::model::Model;
use crate::symbolic::{Expr, Limit, Node, Pool, Symbol};

/// More terms than this are not taken apart: the answer would not be readable.
const MOST_TERMS: usize = 2_000;
/// Nor are higher total powers of the coordinates.
const HIGHEST_POWER: u32 = 16;

/// One term `coefficient * prod u_i^powers[i] * exp(sum slopes[i] u_i)`.
#[derive(Clone, Debug)]
pub(super) struct Monomial {
    pub(super) coefficient: Expr,
    pub(super) powers: BTreeMap<usize, u32>,
    pub(super) slopes: BTreeMap<usize, Expr>,
}

/// A function of the rows of a Gaussian system, taken apart.
#[derive(Clone, Debug)]
pub(super) struct Tilted {
    pub(super) terms: Vec<Monomial>,
}

impl Tilted {
    /// Takes a formula in the states apart, after the states have been expressed by their
    /// coordinates. None where a state without a Gaussian coordinate occurs, or a term is not a
    /// polynomial times an exponential.
    pub(super) fn read(model: &Model, gaussian: &Gaussian, formula: Expr) -> Option<Self> {
        let pool = &model.pool;
        let inside = in_coordinates(model, gaussian, formula)?;
        let read = |e: Expr| Self::split(model, gaussian, pool.expand(e));
        read(inside).or_else(|| read(pool.simplify(inside)))
    }

    fn split(model: &Model, gaussian: &Gaussian, expanded: Expr) -> Option<Self> {
        let pool = &model.pool;
        let terms = summands(pool, expanded);
        if terms.len() > MOST_TERMS {
            pool.exceed(Limit::Moments);
            return None;
        }
        let read = |term: Expr| {
            let one = pool.one();
            let start = Monomial {
                coefficient: one,
                powers: BTreeMap::new(),
                slopes: BTreeMap::new(),
            };
            factors(pool, term)
                .into_iter()
                .try_fold(start, |m, f| m.times(model, gaussian, f))
        };
        terms
            .into_iter()
            .map(read)
            .collect::<Option<Vec<_>>>()
            .map(|terms| Self { terms })
    }

    /// The expectation, in the symbols that stand for means and covariances.
    pub(super) fn expectation(&self, pool: &Pool, gaussian: &Gaussian) -> Expr {
        let terms = self.terms.iter().map(|m| m.expectation(pool, gaussian));
        pool.sum(terms.collect::<Vec<_>>())
    }

    /// `(constant, slopes)` where the function is affine in the coordinates.
    pub(super) fn affine(&self, pool: &Pool) -> Option<(Expr, BTreeMap<usize, Expr>)> {
        let mut constant = pool.zero();
        let mut slopes = BTreeMap::new();
        for term in &self.terms {
            let degree: u32 = term.powers.values().sum();
            if !term.slopes.is_empty() || degree > 1 {
                return None;
            }
            match term.powers.keys().next() {
                None => constant = pool.add(constant, term.coefficient),
                Some(&row) => {
                    let slope = slopes.entry(row).or_insert_with(|| pool.zero());
                    *slope = pool.add(*slope, term.coefficient);
                }
            }
        }
        Some((constant, slopes))
    }

    /// `(factor, slopes)` where the function is `factor * exp(slopes . u)`.
    pub(super) fn exponential(&self, pool: &Pool) -> Option<(Expr, BTreeMap<usize, Expr>)> {
        let first = self.terms.first()?;
        let alike = |m: &Monomial| m.powers.is_empty() && m.slopes == first.slopes;
        if first.slopes.is_empty() || !self.terms.iter().all(alike) {
            return None;
        }
        let factor = pool.sum(self.terms.iter().map(|m| m.coefficient).collect::<Vec<_>>());
        Some((factor, first.slopes.clone()))
    }
}

/// The formula with every state in terms of its coordinate; none where a state has no Gaussian one.
pub(super) fn in_coordinates(model: &Model, gaussian: &Gaussian, formula: Expr) -> Option<Expr> {
    let mut map = BTreeMap::new();
    for symbol in model.pool.symbols_of(formula) {
        if let Some(state) = model.state_of(symbol) {
            let row = gaussian.rows.iter().find(|row| row.state == state)?;
            map.insert(symbol, row.inverse);
        }
    }
    Some(model.pool.substitute(formula, &map))
}

impl Monomial {
    fn times(mut self, model: &Model, gaussian: &Gaussian, factor: Expr) -> Option<Self> {
        let pool = &model.pool;
        let occurs = |symbol: &Symbol| gaussian.position(*symbol).is_some();
        let inside: Vec<Symbol> = pool.symbols_of(factor).into_iter().filter(occurs).collect();
        if inside.is_empty() {
            self.coefficient = pool.mul(self.coefficient, factor);
            return Some(self);
        }
        if let Some(exponent) = exponent_of(pool, factor) {
            let exponent = affine(pool, exponent, &inside)?;
            self.coefficient = pool.mul(self.coefficient, pool.exp(exponent.constant));
            for (&symbol, slope) in inside.iter().zip(exponent.slopes) {
                let known = self.slopes.entry(gaussian.position(symbol)?);
                let known = known.or_insert_with(|| pool.zero());
                *known = pool.add(*known, slope);
            }
            self.slopes.retain(|_, slope| !pool.is_zero_literal(*slope));
            return Some(self);
        }
        let (symbol, power) = match &*pool.node(factor) {
            Node::Symbol(symbol) => (*symbol, 1),
            Node::Power(base, exponent) => match &*pool.node(*base) {
                Node::Symbol(symbol) => (*symbol, small_power(pool.as_number(*exponent)?)?),
                _ => return None,
            },
            _ => return None,
        };
        *self.powers.entry(gaussian.position(symbol)?).or_insert(0) += power;
        (self.powers.values().sum::<u32>() <= HIGHEST_POWER).then_some(self)
    }

    pub(super) fn expectation(&self, pool: &Pool, gaussian: &Gaussian) -> Expr {
        let mean = |i: usize| pool.var(mean_symbol(pool, &gaussian.rows[i]));
        let covariance = |i: usize, j: usize| {
            let (i, j) = (i.min(j), i.max(j));
            pool.var(covariance_symbol(
                pool,
                &gaussian.rows[i],
                &gaussian.rows[j],
            ))
        };
        let mut exponent = Vec::new();
        for (&i, &slope) in &self.slopes {
            exponent.push(pool.mul(slope, mean(i)));
            for (&j, &other) in &self.slopes {
                exponent.push(pool.product([pool.ratio(1, 2), slope, other, covariance(i, j)]));
            }
        }
        let tilted = |i: usize| {
            let shift = self
                .slopes
                .iter()
                .map(|(&j, &slope)| pool.mul(slope, covariance(i, j)));
            pool.sum(std::iter::once(mean(i)).chain(shift).collect::<Vec<_>>())
        };
        let moment = isserlis(
            pool,
            &self.powers,
            &tilted,
            &covariance,
            &mut BTreeMap::new(),
        );
        pool.product([self.coefficient, pool.exp(pool.sum(exponent)), moment])
    }
}

/// `E[prod v_i^n_i]` by recursion on the first coordinate that occurs.
fn isserlis(
    pool: &Pool,
    powers: &BTreeMap<usize, u32>,
    mean: &dyn Fn(usize) -> Expr,
    covariance: &dyn Fn(usize, usize) -> Expr,
    known: &mut BTreeMap<BTreeMap<usize, u32>, Expr>,
) -> Expr {
    let Some(&i) = powers.keys().next() else {
        return pool.one();
    };
    if let Some(&value) = known.get(powers) {
        return value;
    }
    let rest = lower(powers, i);
    let mut terms = vec![pool.mul(mean(i), isserlis(pool, &rest, mean, covariance, known))];
    for (&j, &n) in &rest {
        let derivative = isserlis(pool, &lower(&rest, j), mean, covariance, known);
        terms.push(pool.product([pool.int(i64::from(n)), covariance(i, j), derivative]));
    }
    let value = pool.sum(terms);
    known.insert(powers.clone(), value);
    value
}

/// The powers with one factor of coordinate `i` taken away.
fn lower(powers: &BTreeMap<usize, u32>, i: usize) -> BTreeMap<usize, u32> {
    let mut rest = powers.clone();
    match rest.get_mut(&i) {
        Some(n) if *n > 1 => *n -= 1,
        _ => {
            rest.remove(&i);
        }
    }
    rest
}
