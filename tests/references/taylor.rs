//! The strong Taylor scheme of order 1.5: its exact discrete moments and strong errors (reference E; Kloeden &
//! Platen 1992, section 10.4), and the covariances of the integrals that it draws.

use driftwright_tests::harness::checks::{Check, assert_family};
use driftwright_tests::harness::reference::Reference;

use crate::estimate::estimate;
use crate::model::ModelText;
use crate::schemes::{linear, linear_family, run, value};

/// The slopes of the strong error are among the checks.
#[test]
fn on_the_linear_equation() {
    assert_family(&linear_family(
        "E-linear-decay-taylor15",
        "strong_taylor_1_5",
        2_000_000,
    ));
}

/// Milstein's values are refused.
#[test]
fn milstein_does_not_pass_for_it() {
    let reference = Reference::load("E");
    let case = reference.by_id("E-linear-decay-taylor15");
    let paths = run(case, &linear(case, "milstein"), 16, 200_000);
    let miss = paths.check(0, "miss", value(case, "rms_strong_error", 16).powi(2));
    assert!(!miss.passes(10.0), "{miss}");
}

/// Rates, volatilities and the correlation of two linear equations with additive noise.
const RATES: [f64; 2] = [1.4, -0.6];
const VOLATILITIES: [f64; 2] = [0.5, 0.8];
const RHO: f64 = -0.7;

/// A step is `X (1 - k h + k^2 h^2/2) + b (dW - k dZ)` with `Cov(dW_i, dZ_j) = rho h^2/2` and
/// `Cov(dZ_i, dZ_j) = rho h^3/3`: the covariance of two such after a number of steps.
fn covariance(i: usize, j: usize, h: f64, steps: usize, integrals: f64) -> f64 {
    let factor = |k: f64| 1.0 - k * h + 0.5 * k * k * h * h;
    let rho = if i == j { 1.0 } else { RHO };
    let (k, l) = (RATES[i], RATES[j]);
    let fresh = h - 0.5 * (k + l) * h * h + k * l * h * h * h * integrals;
    let fresh = VOLATILITIES[i] * VOLATILITIES[j] * rho * fresh;
    (0..steps).fold(0.0, |c, _| c * factor(k) * factor(l) + fresh)
}

#[test]
fn integrals_of_correlated_drivers() {
    let scheme = "scheme = \"strong_taylor_1_5\"";
    let mut model = ModelText::new(&["W", "B"]).correlated("W", "B", RHO);
    for (i, driver) in ["W", "B"].into_iter().enumerate() {
        let drift = format!("{:?} - {:?}*X{i}", 0.3, RATES[i]);
        let noise = format!("{:?}", VOLATILITIES[i]);
        model = model
            .state(&format!("X{i}"), "0", &drift, &[(driver, &noise)], scheme)
            .readout(&format!("square{i}"), &format!("X{i}^2"));
    }
    let model = model.readout("product", "X0*X1");
    let (time, steps) = (2.0, 4);
    let h = time / steps as f64;
    let paths = estimate("taylor-pair", &model, &[time], Some(steps), 4_000_000);
    let mean = |i: usize| {
        let k = RATES[i];
        let factor = 1.0 - k * h + 0.5 * k * k * h * h;
        (0..steps).fold(0.0, |m, _| m * factor + 0.3 * (h - 0.5 * k * h * h))
    };
    let second =
        |i: usize, j: usize, integrals| covariance(i, j, h, steps, integrals) + mean(i) * mean(j);
    let checks = |integrals: f64| -> Vec<Check> {
        vec![
            paths.check(0, "X0", mean(0)),
            paths.check(0, "X1", mean(1)),
            paths.check(0, "square0", second(0, 0, integrals)),
            paths.check(0, "square1", second(1, 1, integrals)),
            paths.check(0, "product", second(0, 1, integrals)),
        ]
    };
    assert_family(&checks(1.0 / 3.0));
    // Integrals that were no more than h dW/2 would have the variance h^3/4.
    let twin = checks(0.25);
    assert!(twin.iter().any(|c| !c.passes(6.0)), "{twin:?}");
}
