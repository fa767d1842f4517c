//! Moments and laws of Brownian motions with a random drift, and of their distances from the start.
//!
//! With `w = (m + f)/(2 m)` at the initial value `a`, the law at time t of a coordinate on the line is the mixture
//! of normal laws about `a + m t` and `a - m t` with the weights `w` and `1 - w`. On the half line the same holds of
//! the absolute value of a normal variable, with `w > 1`: the transition density is
//! `exp(-m^2 t/(2 s^2)) sinh(k y)/sinh(k a) (phi(y - a) - phi(y + a))` with `k = m/s^2` and the normal density `phi` of variance `s^2 t`
//! (Rogers and Pitman 1981), in which each exponential shifts a normal density by `m t`.

use std::collections::BTreeMap;

use driftwright_runtime::{Unfused, math};

use super::gaussian::{Gaussian, GaussianRow, covariance_symbol, mean_symbol};
use super::kinks::Kinks;
use super::tilting::{Monomial, Tilted};
use super::{ImageLaw, LawName, Moments};
use crate::analysis::random_drift::{RandomDrift, Shape, find};
use crate::analysis::scalar::entangled;
use crate::calculus::Dynamics;
use crate::model::Model;
use crate::symbolic::{Expr, Pool, Symbol};

/// A state with a random drift.
pub(super) struct Drifting {
    state: usize,
    /// Its coordinate's place in the system.
    row: usize,
    law: Box<RandomDrift>,
}

/// The states with a random drift.
pub(super) struct Drifts {
    states: Vec<Drifting>,
    /// The Gaussian system, and beside it the coordinates of these states as if their drift was upwards.
    pub(super) system: Gaussian,
}

impl Drifts {
    /// Those of `states` that have such a law and move independently of all others.
    pub(super) fn find(
        model: &Model,
        dynamics: &Dynamics,
        gaussian: &Gaussian,
        states: impl Iterator<Item = usize>,
    ) -> Self {
        let mut rows = gaussian.rows.clone();
        let mut found = Vec::new();
        for state in states {
            let Some(law) = find(model, dynamics, state).law() else {
                continue;
            };
            if !entangled(model, dynamics, state).is_empty() {
                continue;
            }
            let row = rows.len();
            rows.push(GaussianRow {
                state,
                symbol: law.coordinate.symbol,
                forward: law.coordinate.forward,
                inverse: law.coordinate.inverse,
                a: Vec::new(),
                alpha: law.speed,
                c: law.noise.clone(),
            });
            found.push(Drifting { state, row, law });
        }
        Self {
            states: found,
            system: Gaussian::new(rows),
        }
    }

    /// Whether such a state occurs in a formula.
    pub(super) fn occur(&self, model: &Model, formula: Expr) -> bool {
        self.within(model, formula).next().is_some()
    }

    /// The name of the law behind a formula in which such a state occurs.
    pub(super) fn source(&self, model: &Model, formula: Expr) -> Option<&'static str> {
        self.within(model, formula)
            .next()
            .map(|drifting| match drifting.law.shape {
                Shape::Line => "law of a Brownian motion with a random drift",
                Shape::HalfLine => "law of a Bessel process with drift",
            })
    }

    fn within<'a>(&'a self, model: &'a Model, formula: Expr) -> impl Iterator<Item = &'a Drifting> {
        let occurs =
            move |d: &&Drifting| model.pool.depends_on(formula, model.states[d.state].symbol);
        self.states.iter().filter(occurs)
    }

    /// `E[formula]` in the symbols that stand for means and covariances of the other coordinates, and for the
    /// variances of these.
    pub(super) fn expectation(&self, model: &Model, formula: Expr) -> Option<Expr> {
        let (pool, system) = (&model.pool, &self.system);
        let present: Vec<&Drifting> = self.within(model, formula).collect();
        let folded: Vec<usize> = present
            .iter()
            .filter(|d| d.law.shape == Shape::HalfLine)
            .map(|d| d.row)
            .collect();
        let mut value = match Tilted::read(model, system, formula) {
            Some(read) => {
                let terms = read.terms.into_iter();
                let means = terms.map(|term| folded_expectation(pool, system, term, &folded));
                pool.sum(means.collect::<Vec<_>>())
            }
            None if folded.is_empty() => {
                let gaussian = system;
                Kinks { model, gaussian }.expectation(formula)?
            }
            None => return None,
        };
        for drifting in present {
            value = self.over_the_drift(model, drifting, value);
        }
        Some(value)
    }

    /// The mean over the two drifts of a formula in the mean that the coordinate has given the drift.
    fn over_the_drift(&self, model: &Model, drifting: &Drifting, value: Expr) -> Expr {
        let pool = &model.pool;
        let declared = &model.states[drifting.state];
        let start = self.system.start(model, drifting.row);
        let way = pool.mul(drifting.law.speed, pool.var(model.time));
        let symbol = mean_symbol(pool, &self.system.rows[drifting.row]);
        let at_start = BTreeMap::from([(declared.symbol, declared.initial.expr)]);
        let means = [pool.add(start, way), pool.sub(start, way)];
        let weights = drifting.law.weights(model);
        let parts = means.into_iter().zip(weights).map(|(mean, weight)| {
            let weight = pool.simplify(pool.substitute(weight, &at_start));
            pool.mul(
                weight,
                pool.substitute(value, &BTreeMap::from([(symbol, mean)])),
            )
        });
        pool.sum(parts.collect::<Vec<_>>())
    }
}

/// The expectation of a term of which the coordinates `folded` enter by their absolute values; these are independent
/// of one another and of the rest.
fn folded_expectation(
    pool: &Pool,
    system: &Gaussian,
    mut term: Monomial,
    folded: &[usize],
) -> Expr {
    let mut factors = Vec::new();
    for &row in folded {
        let power = term.powers.remove(&row).unwrap_or(0);
        let slope = term.slopes.remove(&row).unwrap_or_else(|| pool.zero());
        let mean = pool.var(mean_symbol(pool, &system.rows[row]));
        let variance = pool.var(covariance_symbol(
            pool,
            &system.rows[row],
            &system.rows[row],
        ));
        let sides = [mean, pool.neg(mean)];
        let sides = sides.map(|mean| positive_side(pool, power, slope, mean, variance));
        factors.push(pool.add(sides[0], sides[1]));
    }
    factors.push(term.expectation(pool, system));
    pool.product(factors)
}

/// `E[u^n exp(l u); u > 0]` of a normal variable: tilted by the exponential, then by recursion from
/// `E[u^n; u > 0] = mean E[u^(n-1); u > 0] + (n - 1) variance E[u^(n-2); u > 0]`, where the boundary term is 0 for n > 1
/// (integration by parts).
fn positive_side(pool: &Pool, power: u32, slope: Expr, mean: Expr, variance: Expr) -> Expr {
    let half = pool.product([pool.ratio(1, 2), pool.square(slope), variance]);
    let factor = pool.exp(pool.add(pool.mul(slope, mean), half));
    let mean = pool.add(mean, pool.mul(slope, variance));
    let deviation = pool.sqrt(variance);
    let z = pool.div(mean, deviation);
    let call = |f| pool.call(f, &[z]);
    let below = call(crate::symbolic::Function::NormalCdf);
    let density = pool.mul(deviation, call(crate::symbolic::Function::NormalPdf));
    let mut moments = vec![below, pool.add(pool.mul(mean, below), density)];
    for n in 2..=power as usize {
        let spread = pool.mul(pool.int(n as i64 - 1), variance);
        let next = pool.add(
            pool.mul(mean, moments[n - 1]),
            pool.mul(spread, moments[n - 2]),
        );
        moments.push(next);
    }
    pool.mul(factor, moments[power as usize])
}

impl Moments {
    /// A state by itself, or an affine function of its coordinate.
    pub(super) fn random_drift_law(&self, formula: Expr) -> Option<ImageLaw> {
        let state = self.only_state(formula)?;
        let law = self.random_drift_of(state)?;
        let (image, affine) = self.image(formula, state, law.coordinate.forward)?;
        let affine = affine
            || law
                .coordinate
                .is_affine(&self.model.pool, self.model.states[state].symbol);
        let name = match (law.shape, affine) {
            (Shape::Line, true) => LawName::GaussianMixture,
            (Shape::Line, false) => LawName::TransformedGaussianMixture,
            (Shape::HalfLine, true) => LawName::BesselWithDrift,
            (Shape::HalfLine, false) => LawName::TransformedBesselWithDrift,
        };
        Some(ImageLaw {
            name: Some(name),
            ..image
        })
    }

    fn random_drift_of(&self, state: usize) -> Option<&RandomDrift> {
        let mut states = self.drifts.states.iter();
        Some(&states.find(|d| d.state == state)?.law)
    }

    pub(super) fn random_drift_cdf(
        &self,
        law: &ImageLaw,
        x: f64,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        let (pool, process) = (&self.model.pool, self.random_drift_of(law.state)?);
        let mut at = values.clone();
        at.insert(self.model.time, t);
        at.insert(law.variable, x);
        let place = pool.eval_f64(law.forward, &at)?;
        let declared = &self.model.states[law.state];
        let start = BTreeMap::from([(declared.symbol, declared.initial.expr)]);
        let number = |e: Expr| {
            let value = pool.eval_f64(pool.substitute(e, &start), values);
            value.filter(|v| v.is_finite())
        };
        let start = number(process.coordinate.forward)?;
        let way = number(process.speed)? * t;
        let deviation = (number(process.square)? * t).sqrt();
        let cdf = |z: f64| math::normal_cdf::<Unfused>(z / deviation);
        let [up, down] = process.weights(&self.model);
        let mut below = 0.0;
        for (weight, mean) in [(number(up)?, start + way), (number(down)?, start - way)] {
            let part = match process.shape {
                Shape::Line => cdf(place - mean),
                Shape::HalfLine if place <= 0.0 => 0.0,
                Shape::HalfLine => cdf(place - mean) - cdf(-place - mean),
            };
            below += weight * part;
        }
        Some(if law.increasing { below } else { 1.0 - below })
    }
}
