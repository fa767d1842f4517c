//! The compiler's own moments and distribution functions against reference B: no simulation, ten digits.

use std::collections::BTreeMap;

use driftwright::pipeline::Compiled;
use driftwright::symbolic::{Expr, Symbol};
use driftwright_tests::harness::interpret::compiled;
use driftwright_tests::harness::reference::{Case, CheckValue, Reference};
use driftwright_tests::harness::values::number;

use crate::laws::{in_scope, model, of_state};

/// A compiled case at its own parameter values and time.
struct Setting {
    compiled: Compiled,
    values: BTreeMap<Symbol, f64>,
    time: f64,
}

impl Setting {
    fn new(case: &Case, more: &str) -> Self {
        let name = case.id.to_lowercase().replace('-', "_");
        let compiled = compiled(&case.id, &model(case, more).text(&name));
        let parameters = &compiled.model.parameters;
        let values = parameters
            .iter()
            .map(|p| (p.symbol, case.parameter(&p.name)))
            .collect();
        Self {
            compiled,
            values,
            time: number(case.entry("t")),
        }
    }

    fn state(&self, name: &str) -> Option<Expr> {
        let pool = &self.compiled.model.pool;
        let state = self.compiled.model.states.iter().find(|s| s.name == name)?;
        Some(pool.var(state.symbol))
    }

    /// A closed formula's value here.
    fn at(&self, formula: Expr) -> f64 {
        let mut point = self.values.clone();
        point.insert(self.compiled.model.time, self.time);
        let value = self.compiled.model.pool.eval_f64(formula, &point);
        value.expect("a moment has a value")
    }

    fn central(&self, state: Expr, order: u32) -> Option<f64> {
        let moment = self.compiled.moments.central(state, order)?;
        Some(self.at(moment.value))
    }

    /// What the compiler says of a quantity; none where it has no closed form or the quantity is not of one time.
    fn value(&self, check: &CheckValue) -> Option<f64> {
        let (kind, inside) = of_state(&check.quantity);
        let moments = &self.compiled.moments;
        if kind == "cov" {
            let (a, b) = inside?.split_once(',')?;
            let (a, b) = (self.state(a)?, self.state(b)?);
            return moments.numeric_covariance(a, b, &self.values, self.time);
        }
        let state = self.state(inside.unwrap_or("X"));
        match kind {
            "mean" => moments.numeric_mean(state?, &self.values, self.time),
            "var" => moments.numeric_variance(state?, &self.values, self.time),
            "skew" => Some(self.central(state?, 3)? / self.central(state?, 2)?.powf(1.5)),
            "ex_kurt" => Some(self.central(state?, 4)? / self.central(state?, 2)?.powi(2) - 3.0),
            "cdf" => self.cdf(state?, check.level()),
            // The distribution function at the quantile gives the probability back.
            "quantile" => self.cdf(state?, check.value),
            "median" => self.cdf(state?, check.value),
            "E[exp" => {
                let pool = &self.compiled.model.pool;
                let discount = pool.exp(pool.neg(self.state("I")?));
                moments.numeric_mean(discount, &self.values, self.time)
            }
            _ => None,
        }
    }

    fn cdf(&self, state: Expr, x: f64) -> Option<f64> {
        let moments = &self.compiled.moments;
        let law = moments.marginal_law(state)?;
        moments.marginal_cdf(&law, x, &self.values, self.time)
    }
}

/// The value the compiler must give for a check.
fn expected(check: &CheckValue) -> f64 {
    match check.quantity.as_str() {
        "quantile" => check.level(),
        "median" => 0.5,
        _ => check.value,
    }
}

#[test]
fn moments_and_distribution_functions_have_ten_digits() {
    let reference = Reference::load("B");
    let (mut compared, mut wrong) = (0, Vec::new());
    for (case, more) in in_scope(&reference) {
        let setting = Setting::new(case, more);
        for check in &case.check {
            let Some(value) = setting.value(check) else {
                continue;
            };
            compared += 1;
            let expected = expected(check);
            let error = (value - expected).abs();
            if error.is_nan() || error > 1e-10 * expected.abs().max(1e-2) {
                wrong.push(format!("{} {}: {value}", case.id, check.quantity));
            }
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
    // Moments of the logit and tanh images of a normal law have no closed form; their distributions are not in the file.
    assert!(compared >= 121, "only {compared} values compared");
}

/// Where the compiler gives mean and variance as formulas, they have the same digits.
#[test]
fn formulas_of_mean_and_variance_have_ten_digits() {
    let reference = Reference::load("B");
    let mut compared = 0;
    for (case, more) in in_scope(&reference) {
        let setting = Setting::new(case, more);
        for check in &case.check {
            let (kind, inside) = of_state(&check.quantity);
            let Some(state) = setting.state(inside.unwrap_or("X")) else {
                continue;
            };
            let moment = match kind {
                "mean" => setting.compiled.moments.mean(state),
                "var" => setting.compiled.moments.variance(state),
                _ => None,
            };
            if let Some(moment) = moment {
                compared += 1;
                let value = setting.at(moment.value);
                let error = (value / check.value - 1.0).abs();
                let what = format!("{} {}", case.id, check.quantity);
                assert!(error < 1e-10, "{what}: {value} against {}", check.value);
            }
        }
    }
    assert!(compared >= 20, "only {compared} formulas");
}
