//! Drifts that grow faster than linearly: the tamed schemes (reference E; Hutzenthaler, Jentzen & Kloeden 2011 and
//! 2012), and what becomes of Euler's scheme beside them.

use driftwright_tests::harness::checks::{Check, assert_family};
use driftwright_tests::harness::reference::{Case, Reference};
use driftwright_tests::harness::values::number;

use crate::estimate::estimate;
use crate::model::ModelText;

/// The values that a scheme takes step by step without noise.
fn sequence(case: &Case, scheme: &str, length: usize) -> Vec<f64> {
    let h = case.parameter("h");
    let model = ModelText::new(&["W"]).parameters_of(case).state(
        "X",
        "x0",
        "-X^3",
        &[],
        &format!("scheme = \"{scheme}\""),
    );
    let times: Vec<f64> = (1..length).map(|n| n as f64 * h).collect();
    let name = format!("{}-{scheme}", case.id);
    let paths = estimate(&name, &model, &times, Some(length - 1), 512);
    (0..length - 1).map(|n| paths.mean(n, "X").0).collect()
}

#[test]
fn steps_without_noise() {
    let reference = Reference::load("E");
    for id in ["E-blowup-h0.5-x3", "E-blowup-h0.125-x5"] {
        let case = reference.by_id(id);
        for (scheme, key) in [
            ("tamed_euler", "tamed_sequence"),
            ("tamed_milstein", "tamed_sequence"),
            ("euler_maruyama", "euler_sequence"),
        ] {
            let list = case.entry(key).as_array().expect("a list");
            let expected: Vec<f64> = list.iter().map(number).collect();
            let found = sequence(case, scheme, expected.len());
            for (ours, theirs) in found.iter().zip(&expected[1..]) {
                let apart = (ours - theirs).abs() / theirs.abs();
                assert!(apart < 1e-12, "{id} {scheme}: {ours} instead of {theirs}");
            }
        }
    }
}

/// The moments at the horizon, from two step sizes extrapolated (Talay & Tubaro 1990); the scheme is the
/// planner's own choice, or drift-implicit.
#[test]
fn moments_with_noise() {
    let reference = Reference::load("E");
    let mut checks = Vec::new();
    for (id, drift) in [
        ("E-cubic-x1.5-s1", "-X^3"),
        ("E-doublewell-x0.5-s0.7", "X - X^3"),
    ] {
        let case = reference.by_id(id);
        for scheme in ["", "scheme = \"drift_implicit_euler\""] {
            let model = ModelText::new(&["W"])
                .parameters_of(case)
                .state("X", "x0", drift, &[("W", "sigma")], scheme)
                .readout("square", "X^2")
                .readout("fourth", "X^4");
            let with = |steps| {
                let name = format!("{id}-{steps}");
                estimate(&name, &model, &[case.parameter("T")], Some(steps), 500_000)
            };
            let (coarse, fine) = (with(128), with(256));
            for (quantity, key) in [
                ("X", "E[X(T)]"),
                ("square", "E[X(T)^2]"),
                ("fourth", "E[X(T)^4]"),
            ] {
                let (_, analytic) = case.values_at(key).next().expect("a value");
                let (a, b) = (
                    coarse.check(0, quantity, analytic),
                    fine.check(0, quantity, analytic),
                );
                checks.push(Check {
                    sample: 2.0 * b.sample - a.sample,
                    // Errors of the two runs add whatever their dependence.
                    std_error: 2.0 * b.std_error + a.std_error,
                    ..b
                });
            }
        }
    }
    assert_eq!(checks.len(), 12);
    assert_family(&checks);
}
