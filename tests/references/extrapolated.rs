//! Laws of reference B that no exact step reaches yet: logistic growth, by two step sizes on independent paths,
//! extrapolated (Talay & Tubaro 1990).

use driftwright_tests::harness::checks::{Check, assert_family};
use driftwright_tests::harness::reference::{Case, Reference};
use driftwright_tests::harness::values::number;

use crate::estimate::{Estimates, estimate};
use crate::model::ModelText;

const STEPS: usize = 64;
const PATHS: u64 = 500_000;

/// Estimates with the step and with half of it.
struct Pair {
    coarse: Estimates,
    fine: Estimates,
}

impl Pair {
    fn run(case: &Case, model: &ModelText) -> Self {
        let time = [number(case.entry("t"))];
        let with = |name: &str, steps| estimate(name, model, &time, Some(steps), PATHS);
        Self {
            coarse: with(&case.id, STEPS),
            // Another name, the same seed: a finer grid has other normals at each of its steps.
            fine: with(&format!("{}-fine", case.id), 2 * STEPS),
        }
    }

    fn check(&self, quantity: &str, analytic: f64) -> Check {
        let (a, b) = (
            self.coarse.check(0, quantity, analytic),
            self.fine.check(0, quantity, analytic),
        );
        Check {
            sample: 2.0 * b.sample - a.sample,
            // Errors of the two runs add whatever their dependence.
            std_error: 2.0 * b.std_error + a.std_error,
            ..b
        }
    }
}

/// One state with its equation from the case.
fn model(case: &Case, more: &str) -> ModelText {
    let text = |name: &str| case.entry(name).as_array().expect("a list")[0].clone();
    let drift = text("drift");
    let row = text("diffusion");
    let noise = row[0].as_str().expect("a formula");
    let start = number(&text("x0"));
    ModelText::new(&["W"]).parameters_of(case).state(
        "X",
        &format!("{start:?}"),
        drift.as_str().expect("a formula"),
        &[("W", noise)],
        more,
    )
}

#[test]
fn logistic_growth() {
    let reference = Reference::load("B");
    let mut checks = Vec::new();
    for case in reference.family("verhulst") {
        let reciprocal = case.value("E[1/X]");
        let model = model(case, "domain = \"(0, inf)\"\nthrough = \"log(X)\"")
            .readout("square", "X^2")
            .readout("reciprocal", "1/X")
            .readout("scatter", &format!("(1/X - {reciprocal:?})^2"));
        let pair = Pair::run(case, &model);
        checks.push(pair.check("X", case.value("mean")));
        checks.push(pair.check("square", case.value("E[X^2]")));
        checks.push(pair.check("reciprocal", reciprocal));
        checks.push(pair.check("scatter", case.value("Var[1/X]")));
    }
    assert_eq!(checks.len(), 8, "values in scope");
    assert_family(&checks);
}
