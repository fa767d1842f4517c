//! The laws of the next state that a simulator tells (`Simulator::law`), against the published means, variances,
//! distribution functions and quantiles of reference B.

use std::collections::BTreeMap;

use driftwright::pipeline::{Compiled, compile};
use driftwright::source::SourceFile;
use driftwright::symbolic::Symbol;
use driftwright_runtime::Simulator as _;
use driftwright_runtime::law::Law;
use driftwright_tests::harness::interpret::interpreter;
use driftwright_tests::harness::reference::{Case, CheckValue, Reference};
use driftwright_tests::harness::values::number;

use crate::laws::{in_scope, model, of_state};

/// Relative for moments, absolute for probabilities: the values have eleven digits, the quadrature behind the moments
/// of images ten.
const ALLOWED: f64 = 1e-10;

/// The law of the only state at the case's time, times `stretch`, given its start.
fn law(case: &Case, more: &str, stretch: f64) -> Option<Box<dyn Law>> {
    let name = case.id.to_lowercase().replace('-', "_");
    let text = model(case, more).text(&name);
    let simulator = interpreter(&case.id, &text, &BTreeMap::new());
    let before = number(&case.entry("x0").as_array().expect("a list")[0]);
    simulator.law(0, before, 0.0, stretch * number(case.entry("t")))
}

/// What the law gives for a value, and what is published.
fn compared(law: &dyn Law, check: &CheckValue) -> Option<(f64, f64)> {
    let (kind, state) = of_state(&check.quantity);
    if state.is_some_and(|s| s != "X") {
        return None;
    }
    match kind {
        "mean" => Some((law.mean() / check.value, 1.0)),
        "var" => Some((law.variance() / check.value, 1.0)),
        "cdf" => Some((law.cdf(check.level()), check.value)),
        "quantile" => Some((law.cdf(check.value), check.level())),
        "median" => Some((law.cdf(check.value), 0.5)),
        _ => None,
    }
}

#[test]
fn laws_of_the_next_state_are_those_of_the_literature() {
    let reference = Reference::load("B");
    let (mut seen, mut families) = (0, Vec::new());
    for (case, more) in in_scope(&reference) {
        let Some(law) = law(case, more, 1.0) else {
            continue;
        };
        families.push(case.family.as_str());
        let mut wrong = 0;
        let other = self::law(case, more, 1.01).expect("a law at any time");
        for check in &case.check {
            let Some((found, published)) = compared(&*law, check) else {
                continue;
            };
            seen += 1;
            assert!(
                (found - published).abs() < ALLOWED,
                "{}: {} at {:?} is {found}, published {published}",
                case.id,
                check.quantity,
                check.at
            );
            let (beside, _) = compared(&*other, check).expect("as before");
            wrong += usize::from((beside - published).abs() > ALLOWED);
        }
        // The law one hundredth later is another one.
        assert!(wrong > 0, "{}", case.id);
    }
    families.dedup();
    assert_eq!(families.len(), 11, "{families:?}");
    assert_eq!(seen, 122, "values compared");
}

/// The formulas that the derivation shows for a normal transition, at the case's values.
struct Shown {
    compiled: Compiled,
    values: BTreeMap<Symbol, f64>,
}

impl Shown {
    fn new(case: &Case, more: &str) -> Self {
        let name = case.id.to_lowercase().replace('-', "_");
        let text = model(case, more).text(&name);
        let compiled = compile(&SourceFile::new("case.toml", text)).compiled;
        let compiled = compiled.expect("a model");
        let (model, pool) = (&compiled.model, &compiled.model.pool);
        let mut values = BTreeMap::from([(model.time, number(case.entry("t")))]);
        for p in &model.parameters {
            let value = pool.number(p.value.clone().expect("a value"));
            let value = pool.eval_f64(value, &BTreeMap::new()).expect("a number");
            values.insert(p.symbol, value);
        }
        let before = number(&case.entry("x0").as_array().expect("a list")[0]);
        values.insert(model.states[0].symbol, before);
        Self { compiled, values }
    }

    /// The value of the formula whose note begins so, for the state at `after`.
    fn value(&self, note: &str, after: f64) -> Option<f64> {
        let pool = &self.compiled.model.pool;
        let steps = &self.compiled.plan.groups[0].trace.steps;
        let step = steps
            .iter()
            .find(|s| s.rule == "transition law" && s.note.starts_with(note))?;
        let mut values = self.values.clone();
        values.insert(pool.find_symbol("X_after")?, after);
        pool.eval_f64(step.after, &values)
    }
}

/// What the derivation shows of a normal transition and its images is what is published; and its density is what the
/// simulator tells, which the test below holds against the distribution function.
#[test]
fn shown_formulas_are_those_of_the_literature() {
    let reference = Reference::load("B");
    let (mut distributions, mut moments, mut densities) = (0, 0, 0);
    for (case, more) in in_scope(&reference) {
        let shown = Shown::new(case, more);
        for check in &case.check {
            let (kind, state) = of_state(&check.quantity);
            if state.is_some_and(|s| s != "X") {
                continue;
            }
            let (note, after, expected) = match kind {
                "mean" => ("mean of X", 1.0, check.value),
                "var" => ("variance of X", 1.0, check.value),
                "cdf" => ("distribution function of X", check.level(), check.value),
                "quantile" => ("distribution function of X", check.value, check.level()),
                _ => continue,
            };
            let Some(found) = shown.value(note, after) else {
                continue;
            };
            let scale = if note.starts_with("dis") {
                1.0
            } else {
                expected
            };
            assert!(
                ((found - expected) / scale).abs() < ALLOWED,
                "{}: {} is shown as {found}, published {expected}",
                case.id,
                check.quantity
            );
            if !note.starts_with("dis") {
                moments += 1;
                continue;
            }
            distributions += 1;
            let density = shown.value("density of X", after).expect("beside it");
            let told = law(case, more, 1.0).expect("a law").density(after);
            assert!(
                (density / told - 1.0).abs() < 1e-9,
                "{}: {density} {told}",
                case.id
            );
            densities += usize::from(density > 0.0);
        }
    }
    assert!(
        distributions >= 20 && moments >= 4,
        "{distributions} {moments}"
    );
    assert_eq!(densities, distributions);
}

/// Densities are the derivatives of distribution functions.
#[test]
fn densities_belong_to_the_distribution_functions() {
    let reference = Reference::load("B");
    for (case, more) in in_scope(&reference) {
        let Some(law) = law(case, more, 1.0) else {
            continue;
        };
        let quantiles = case.check.iter().filter(|c| c.quantity == "quantile");
        for check in quantiles {
            let x = check.value;
            let deviation = law.variance().sqrt();
            if x.abs() < 1e-6 * deviation {
                // An end at which the density may be infinite.
                continue;
            }
            let width = (1e-4 * deviation).min(1e-3 * x.abs());
            // The rule of five points: error of order width^4.
            let difference = |k: f64| law.cdf(x + k * width) - law.cdf(x - k * width);
            let slope = (8.0 * difference(1.0) - difference(2.0)) / (12.0 * width);
            let density = law.density(x);
            assert!(
                (slope / density - 1.0).abs() < 1e-6,
                "{} at {x}: {slope} {density}",
                case.id
            );
        }
    }
}
