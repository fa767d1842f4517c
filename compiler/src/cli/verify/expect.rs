//! Analytic values: what each statistic of each quantity should be, and how far a sample may stray.

use std::collections::BTreeMap;

use crate::analysis::moments::{MarginalLaw, Moments};
use crate::model::Model;
use crate::symbolic::{Expr, Rational, Symbol};

/// What a sample is held against.
#[derive(Clone, Debug)]
pub(super) enum Statistic {
    /// The mean of an output.
    Mean(usize),
    /// Its variance.
    Variance(usize),
    /// Its skewness.
    Skewness(usize),
    /// The covariance of two outputs, by the index of the pair.
    Covariance(usize),
    /// A quantile of an output: its level's index, and the law.
    Quantile(usize, usize, Box<MarginalLaw>),
    /// The largest difference from zero of an output that should vanish on every path, beside an output
    /// of the size that counts.
    Vanishing(usize, usize),
}

/// Levels of the quantiles that are checked, with their names.
pub(super) const LEVELS: [(f64, &str); 3] = [
    (0.05, "5 % quantile"),
    (0.5, "median"),
    (0.95, "95 % quantile"),
];

/// An analytic value.
#[derive(Clone, Copy, Debug)]
pub(super) struct Expected {
    /// The value.
    pub(super) value: f64,
    /// The standard error of the sample's value times the root of the number of paths, where analysis
    /// knows it; else the sample has to estimate it.
    pub(super) unit_error: Option<f64>,
    /// Paths below which the statistic is not yet close to normal.
    pub(super) paths_needed: f64,
}

/// Evaluates moments and laws of one model at one set of parameters.
pub(super) struct Analyst<'a> {
    pub(super) model: &'a Model,
    pub(super) moments: &'a Moments,
    pub(super) parameters: BTreeMap<Symbol, f64>,
}

/// Central moments of a formula at a time.
#[derive(Clone, Copy, Debug)]
pub(super) struct Central {
    mean: f64,
    variance: f64,
    /// Third to sixth moments of the standardised variable, where they can be had without loss.
    standard: Option<[f64; 4]>,
}

/// Standardised moments from the third to the sixth of the normal law.
const NORMAL: [f64; 4] = [0.0, 3.0, 0.0, 15.0];

impl Analyst<'_> {
    /// The value of a formula in time and parameters.
    pub(super) fn number(&self, formula: Expr, time: f64) -> Option<f64> {
        let mut at = self.parameters.clone();
        at.insert(self.model.time, time);
        self.model
            .pool
            .eval_f64(formula, &at)
            .filter(|v| v.is_finite())
    }

    /// The value of a formula at time 0.
    pub(super) fn at_start(&self, formula: Expr) -> Option<f64> {
        let initial = self
            .model
            .states
            .iter()
            .map(|s| (s.symbol, s.initial.expr))
            .collect();
        self.number(self.model.pool.substitute(formula, &initial), 0.0)
    }

    fn mean(&self, formula: Expr, time: f64) -> Option<f64> {
        self.moments
            .numeric_mean(formula, &self.parameters, time)
            .filter(|v| v.is_finite())
    }

    /// The central moments of a formula; none where its mean or variance is not known.
    pub(super) fn central(&self, formula: Expr, time: f64) -> Option<Central> {
        let mean = self.mean(formula, time)?;
        let variance = self
            .moments
            .numeric_variance(formula, &self.parameters, time)?;
        let variance = Some(variance).filter(|v| v.is_finite())?.max(0.0);
        Some(Central {
            mean,
            variance,
            standard: self.standard(formula, mean, variance, time),
        })
    }

    /// The mean of a formula whose variance is not known: the sample has to say how far it strays.
    pub(super) fn mean_alone(&self, formula: Expr, time: f64) -> Option<Expected> {
        let variance = self
            .moments
            .numeric_variance(formula, &self.parameters, time);
        if variance.is_some() {
            return None;
        }
        Some(Expected {
            value: self.mean(formula, time)?,
            unit_error: None,
            paths_needed: 1e4,
        })
    }

    /// Powers of a variable that is narrow beside its mean cancel digits: then none are given.
    fn standard(&self, formula: Expr, mean: f64, variance: f64, time: f64) -> Option<[f64; 4]> {
        let deviation = variance.sqrt();
        if deviation <= 0.01 * mean.abs() || deviation.is_nan() {
            return None;
        }
        let pool = &self.model.pool;
        let exact = |x: f64| Rational::try_from(x).ok().map(|r| pool.number(r));
        let centred = pool.div(pool.sub(formula, exact(mean)?), exact(deviation)?);
        let mut found = [0.0; 4];
        for (k, slot) in (3..).zip(&mut found) {
            *slot = self.mean(pool.pow(centred, pool.int(k)), time)?;
        }
        let [third, fourth, fifth, sixth] = found;
        // What every distribution obeys (Hankel determinants of low order); rounding that breaks it
        // has spoilt the moments.
        let sound = fourth >= (1.0 + third * third) * 0.999
            && sixth * (1.0 + 1e-6) >= fourth * fourth / 1.001
            && sixth * fourth * 1.001 >= fifth * fifth;
        sound.then_some(found)
    }

    /// The covariance of two formulas.
    pub(super) fn covariance(&self, a: Expr, b: Expr, time: f64) -> Option<f64> {
        self.moments
            .numeric_covariance(a, b, &self.parameters, time)
            .filter(|v| v.is_finite())
    }

    /// A quantile of a law and the unit error of its sample, sqrt(p (1 - p)) / density.
    pub(super) fn quantile(
        &self,
        law: &MarginalLaw,
        level: f64,
        near: f64,
        time: f64,
    ) -> Option<Expected> {
        // In an atom, or close to it, there is no density to take the error from.
        let atom = self.moments.atom(law, &self.parameters, time)?;
        if atom.share(level) <= 1.2 * atom.mass {
            return None;
        }
        let cdf = |x: f64| self.moments.marginal_cdf(law, x, &self.parameters, time);
        let value = invert(&cdf, level, near)?;
        let step = 1e-4 * value.abs().max(1e-8);
        let density = (cdf(value + step)? - cdf(value - step)?) / (2.0 * step);
        let unit_error = (level * (1.0 - level)).sqrt() / density;
        let paths_needed = 100.0 / (level * (1.0 - level));
        (unit_error.is_finite()).then_some(Expected {
            value,
            unit_error: Some(unit_error),
            paths_needed,
        })
    }
}

/// Where a distribution function takes a value, from a point inside the domain: the bracket grows, then
/// is halved. Where the function has no value, below or above that point, the domain has ended.
fn invert(cdf: &dyn Fn(f64) -> Option<f64>, level: f64, near: f64) -> Option<f64> {
    cdf(near)?;
    let at = |x: f64| cdf(x).unwrap_or(if x < near { 0.0 } else { 1.0 });
    let mut width = 1e-3 * near.abs().max(1e-6);
    let (mut low, mut high) = (near - width, near + width);
    while at(low) > level || at(high) < level {
        width *= 2.0;
        (low, high) = (near - width, near + width);
        if !(low.is_finite() && high.is_finite()) {
            return None;
        }
    }
    loop {
        let middle = 0.5 * (low + high);
        if middle <= low || middle >= high {
            return Some(middle);
        }
        if at(middle) < level {
            low = middle
        } else {
            high = middle
        }
    }
}

impl Central {
    fn moments(&self) -> [f64; 4] {
        self.standard.unwrap_or(NORMAL)
    }

    /// Whether the variable varies at all.
    pub(super) fn is_random(&self) -> bool {
        self.variance > 0.0
    }

    /// The mean as something to check.
    pub(super) fn expected_mean(&self) -> Expected {
        let [third, ..] = self.moments();
        Expected {
            value: self.mean,
            unit_error: Some(self.variance.sqrt()),
            paths_needed: 1e3 * (1.0 + third * third),
        }
    }

    /// The variance as something to check: its sample's variance is (m4 - m2^2)/n.
    pub(super) fn expected_variance(&self) -> Expected {
        let [_, fourth, ..] = self.moments();
        let spread = self
            .standard
            .map(|_| self.variance * (fourth - 1.0).max(0.0).sqrt());
        Expected {
            value: self.variance,
            unit_error: if self.variance == 0.0 {
                Some(0.0)
            } else {
                spread
            },
            paths_needed: 1e4 * fourth / 3.0,
        }
    }

    /// The skewness as something to check; the error by the delta method, which is sqrt(6/n) for a
    /// normal law. None where the higher moments are not known.
    pub(super) fn expected_skewness(&self) -> Option<Expected> {
        let [third, fourth, fifth, sixth] = self.standard?;
        let square = sixth - 6.0 * fourth + 9.0 - third * third
            + third * third * (2.25 * (fourth - 1.0) + 9.0)
            - 3.0 * third * (fifth - third);
        Some(Expected {
            value: third,
            unit_error: Some(square.max(0.0).sqrt()),
            paths_needed: 1e4 * sixth / 15.0,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_errors_of_a_normal_sample_are_the_textbooks() {
        // Cramer (1946), Mathematical Methods of Statistics, section 29.3.
        let normal = Central {
            mean: 1.0,
            variance: 4.0,
            standard: Some(NORMAL),
        };
        assert_eq!(normal.expected_mean().unit_error, Some(2.0));
        assert!(
            (normal.expected_variance().unit_error.unwrap() - 4.0 * 2_f64.sqrt()).abs() < 1e-12
        );
        let skewness = normal.expected_skewness().unwrap();
        assert!((skewness.unit_error.unwrap() - 6_f64.sqrt()).abs() < 1e-12);
    }

    #[test]
    fn distribution_functions_are_inverted_from_either_side() {
        let cdf = |x: f64| (x > 0.0).then(|| 1.0 - (-x).exp());
        for near in [0.01, 0.7, 5.0] {
            let median = invert(&cdf, 0.5, near);
            assert!(
                median.is_some_and(|m| (m - 2_f64.ln()).abs() < 1e-12),
                "{near}: {median:?}"
            );
        }
        assert_eq!(invert(&cdf, 0.5, -1.0), None);
    }
}
