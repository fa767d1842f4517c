//! The working of Ito's rule as it is logged, and which states a formula depends on.

use driftwright::calculus::System;
use driftwright::symbolic::trace::Trace;

use crate::common::{compiled, derived};

/// X is driven by Y through its drift, Y by Z through its noise; Z and U stand alone.
const CHAIN: &str = r#"
[model]
name = "chain"
calculus = "ito"
drivers = ["a", "b"]

[parameters]
k = { value = 1.0, range = "(0, inf)" }

[states.X]
initial = "1"
drift = "k*(Y - X)"
diffusion = { a = "k" }

[states.Y]
initial = "1"
drift = "-Y"
diffusion = { a = "Z" }

[states.Z]
initial = "1"
drift = "-k*Z"
diffusion = { b = "k*Z" }

[states.U]
initial = "1"
drift = "-k*U"
diffusion = { b = "1" }

[derived.moving]
formula = "t*X^2"

[derived.mixed]
formula = "X*Y"

[derived.linear]
formula = "3*U + k"

[derived.apart]
formula = "X*U"
"#;

#[test]
fn a_formula_depends_on_what_drives_its_states() {
    let compiled = compiled(CHAIN);
    let system = System::of(&compiled.model, &compiled.dynamics);
    let names = |found: Vec<usize>| -> Vec<String> {
        let states = &compiled.model.states;
        found
            .into_iter()
            .map(|i| states[i].name.to_string())
            .collect()
    };
    let of = |formula: &str| derived(&compiled, formula);
    assert_eq!(names(system.occurring(of("apart"))), ["X", "U"]);
    assert_eq!(names(system.occurring(of("linear"))), ["U"]);
    assert_eq!(names(system.closure([of("moving")])), ["X", "Y", "Z"]);
    assert_eq!(names(system.closure([of("linear")])), ["U"]);
    assert_eq!(names(system.closure([of("apart")])), ["X", "Y", "Z", "U"]);
    for (i, &symbol) in system.symbols.iter().enumerate() {
        assert_eq!(system.position(symbol), Some(i));
    }
    assert_eq!(system.position(compiled.model.time), None);
}

fn steps(trace: &Trace) -> Vec<String> {
    let line = |rule: &str, note: &str| format!("{rule}: {note}");
    trace
        .steps
        .iter()
        .map(|step| line(step.rule, &step.note))
        .collect()
}

/// Each derivative that is not zero, then the parts, then the drivers that matter, in this order.
#[test]
fn the_working_names_what_was_derived_by_what() {
    let compiled = compiled(CHAIN);
    let pool = &compiled.model.pool;
    let trace = |i: usize| &compiled.dynamics.derived[i].trace;
    let correction = "Ito correction: half the second derivatives times the covariations";
    let chain = "chain rule: time derivative plus first derivatives times drifts";
    let both = "drift: both parts collected";
    let (a, b) = (
        "diffusion: coefficient of da",
        "diffusion: coefficient of db",
    );
    assert_eq!(
        steps(trace(0)),
        [
            "time derivative: d/dt",
            "first derivative: d/dX",
            "second derivative: d^2/dX^2",
            "covariation: d<X, X>/dt",
            chain,
            correction,
            both,
            a
        ]
    );
    assert_eq!(
        steps(trace(1)),
        [
            "first derivative: d/dX",
            "first derivative: d/dY",
            "second derivative: d^2/dX dY",
            "covariation: d<X, Y>/dt",
            chain,
            correction,
            both,
            a
        ]
    );
    let none =
        "Ito correction: every second derivative that could meet noise is zero: no correction";
    assert_eq!(
        steps(trace(2)),
        ["first derivative: d/dU", chain, none, both, b]
    );
    // X and U have no driver in common: their covariation is zero and does not count.
    assert_eq!(
        steps(trace(3)),
        [
            "first derivative: d/dX",
            "first derivative: d/dU",
            chain,
            none,
            both,
            a,
            b
        ]
    );
    // What a step starts from is shown where it differs from what comes out.
    for step in (0..4).flat_map(|i| &trace(i).steps) {
        assert_ne!(step.before, Some(step.after), "{}", step.note);
        if let Some(before) = step.before {
            assert!(pool.equal(before, step.after).is_yes(), "{}", step.note);
        }
    }
    let rewritten = trace(0).steps.iter().filter(|step| step.before.is_some());
    assert!(rewritten.count() > 0);
}
