//! Schemes against their own exact discrete moments and strong errors (reference E): the values are computed from
//! the one-step recursion, so a Monte Carlo estimate must agree within its standard error at every step size.

use driftwright_tests::harness::checks::{Check, assert_family};
use driftwright_tests::harness::reference::{Case, Reference};

use crate::estimate::{Estimates, estimate};
use crate::model::ModelText;

/// The linear equation by a scheme, with its exact solution on the same path (Kloeden & Platen 1992, section 4.4).
pub(crate) fn linear(case: &Case, scheme: &str) -> ModelText {
    ModelText::new(&["W"])
        .parameters_of(case)
        .state(
            "X",
            "x0",
            "l*X",
            &[("W", "u*X")],
            &format!("scheme = \"{scheme}\""),
        )
        .state("B", "0", "0", &[("W", "1")], "")
        .readout("square", "X^2")
        .readout("miss", "(x0*exp((l - u^2/2)*t + u*B) - X)^2")
}

/// Values of the case at a number of steps.
pub(crate) fn value(case: &Case, quantity: &str, steps: usize) -> f64 {
    case.values_at(quantity)
        .find(|(at, _)| *at == steps as f64)
        .unwrap_or_else(|| panic!("{} {quantity} at {steps}", case.id))
        .1
}

pub(crate) fn run(case: &Case, model: &ModelText, steps: usize, paths: u64) -> Estimates {
    let name = format!("{}-{steps}", case.id);
    estimate(&name, model, &[case.parameter("T")], Some(steps), paths)
}

/// The slope of the log root mean square error over a halving of the step, as a test of its own.
fn slope(case: &Case, coarse: (usize, &Estimates), fine: (usize, &Estimates)) -> Check {
    let ((a, sa), (b, sb)) = (coarse.1.mean(0, "miss"), fine.1.mean(0, "miss"));
    let span = (fine.0 as f64 / coarse.0 as f64).ln();
    let rms = |n: usize| value(case, "rms_strong_error", n);
    Check {
        what: format!("{} slope from {} to {} steps", case.id, coarse.0, fine.0),
        sample: 0.5 * (a / b).ln() / span,
        analytic: (rms(coarse.0) / rms(fine.0)).ln() / span,
        std_error: 0.5 * (sa / a).hypot(sb / b) / span,
    }
}

/// Mean, second moment and mean square miss at each number of steps, and the slope of the miss from the
/// first to the last.
fn family(
    case: &Case,
    model: &ModelText,
    steps: [usize; 3],
    paths: u64,
    second_moment: impl Fn(&Estimates, usize) -> Check,
) -> Vec<Check> {
    let runs = steps.map(|steps| (steps, run(case, model, steps, paths)));
    let mut checks = Vec::new();
    for (steps, paths) in &runs {
        checks.push(paths.check(0, "X", value(case, "E[X_N]", *steps)));
        checks.push(second_moment(paths, *steps));
        let miss = value(case, "rms_strong_error", *steps).powi(2);
        checks.push(paths.check(0, "miss", miss));
    }
    let [(coarse, first), _, (fine, last)] = &runs;
    checks.push(slope(case, (*coarse, first), (*fine, last)));
    checks
}

/// Paths for a log-normal second moment: 1e4 exp(4 u^2 T) at least.
pub(crate) fn linear_family(id: &str, scheme: &str, paths: u64) -> Vec<Check> {
    let reference = Reference::load("E");
    let case = reference.by_id(id);
    let square =
        |paths: &Estimates, steps| paths.check(0, "square", value(case, "E[X_N^2]", steps));
    family(case, &linear(case, scheme), [8, 16, 64], paths, square)
}

#[test]
fn euler_and_milstein_on_the_linear_equation() {
    let mut checks = linear_family("E-linear-mild-euler", "euler_maruyama", 500_000);
    checks.extend(linear_family("E-linear-mild-milstein", "milstein", 500_000));
    checks.extend(linear_family(
        "E-linear-decay-euler",
        "euler_maruyama",
        2_000_000,
    ));
    checks.extend(linear_family(
        "E-linear-decay-milstein",
        "milstein",
        2_000_000,
    ));
    assert_family(&checks);
}

/// The other scheme's values are refused: the test sees the difference between Euler and Milstein.
#[test]
fn milstein_does_not_pass_for_euler() {
    let reference = Reference::load("E");
    let case = reference.by_id("E-linear-mild-euler");
    let paths = run(case, &linear(case, "milstein"), 16, 200_000);
    let miss = paths.check(0, "miss", value(case, "rms_strong_error", 16).powi(2));
    assert!(!miss.passes(10.0), "{miss}");
}

/// The cases of Higham 2001 (the paper's experiment), at the number of paths its heavy tails ask for.
#[test]
fn linear_equation_with_heavy_tails() {
    let reference = Reference::load("E");
    let mut checks = Vec::new();
    for (id, scheme) in [
        ("E-linear-higham-euler", "euler_maruyama"),
        ("E-linear-higham-milstein", "milstein"),
    ] {
        let case = reference.by_id(id);
        let model = linear(case, scheme);
        for steps in [4, 16] {
            let paths = run(case, &model, steps, 2_000_000);
            checks.push(paths.check(0, "X", value(case, "E[X_N]", steps)));
            checks.push(paths.check(0, "square", value(case, "E[X_N^2]", steps)));
        }
    }
    assert_family(&checks);
}

/// Additive noise: Euler has strong order 1. The exact process runs beside it on the same driver.
#[test]
fn euler_with_additive_noise() {
    let reference = Reference::load("E");
    let case = reference.by_id("E-additive-ou-a");
    let scheme = "scheme = \"euler_maruyama\"";
    let model = ModelText::new(&["W"])
        .parameters_of(case)
        .state("X", "x0", "k*(th - X)", &[("W", "sg")], scheme)
        .state("Y", "x0", "k*(th - Y)", &[("W", "sg")], "")
        .readout("miss", "(X - Y)^2");
    let variance =
        |paths: &Estimates, steps| paths.variance_check(0, "X", value(case, "Var[X_N]", steps));
    let checks = family(case, &model, [4, 16, 64], 700_000, variance);
    assert_family(&checks);
}

/// Ito's sum for int W dW: left points miss (W^2 - T)/2 by T^2/(2N) in mean square, Milstein's step hits it.
#[test]
fn sums_for_the_integral_of_brownian_motion() {
    let reference = Reference::load("E");
    let case = reference.by_id("E-itosum-T1");
    let model = |scheme: &str| {
        ModelText::new(&["W"])
            .state("B", "0", "0", &[("W", "1")], "")
            .state(
                "J",
                "0",
                "0",
                &[("W", "B")],
                &format!("scheme = \"{scheme}\""),
            )
            .readout("miss", "(J - (B^2 - t)/2)^2")
    };
    let mut checks = Vec::new();
    for steps in [10, 100] {
        let paths = run(case, &model("euler_maruyama"), steps, 300_000);
        let miss = value(case, "E[(left_sum - (W^2-T)/2)^2]", steps);
        checks.push(paths.check(0, "miss", miss));
        checks.push(paths.check(0, "J", value(case, "E[left_sum]", steps)));
    }
    assert_family(&checks);
    let exact = run(case, &model("milstein"), 10, 10_000);
    let (miss, _) = exact.mean(0, "miss");
    assert!(miss < 1e-28, "Milstein's step is exact here: {miss}");
}

/// Growth of the second moment under one step of Euler's scheme (Saito & Mitsui 1996, from memory), and of the
/// logarithm of its modulus.
#[test]
fn stability_of_one_step() {
    let reference = Reference::load("E");
    let mut checks = Vec::new();
    for (id, quantity) in [
        ("E-stab-ms-public", "mean_square_factor"),
        ("E-stab-as-public", "E[log|1+h*l+sqrt(h)*u*Z|]"),
    ] {
        let case = reference.by_id(id);
        let model = ModelText::new(&["W"])
            .parameters_of(case)
            .state(
                "X",
                "1",
                "l*X",
                &[("W", "u*X")],
                "scheme = \"euler_maruyama\"",
            )
            .readout("square", "X^2")
            .readout("log_modulus", "log(abs(X))");
        let own = if quantity == "mean_square_factor" {
            "square"
        } else {
            "log_modulus"
        };
        for (h, value) in case.values_at(quantity) {
            let paths = estimate(&format!("{id}-{h}"), &model, &[h], Some(1), 1_000_000);
            checks.push(paths.check(0, own, value));
        }
    }
    assert_family(&checks);
}
