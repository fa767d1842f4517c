//! Brownian motions with a random drift of the catalogue `exact` against its means, variances and distribution
//! functions: drawn in one step and in several, with twins that have another drift of the same class.

use driftwright_tests::harness::checks::assert_family;

use crate::catalogue::{checks, drift, entries, hides};

const CLASSES: [&str; 2] = ["benes-tanh", "benes-coth"];

#[test]
fn catalogue_laws_are_drawn_in_one_step_and_in_several() {
    let mut all = Vec::new();
    for entry in CLASSES.into_iter().flat_map(entries) {
        for steps in [1, 6] {
            all.extend(checks(&entry, drift(&entry), steps));
        }
    }
    assert_eq!(all.len(), 2 * 2 * 5, "values");
    assert_family(&all);
}

/// Twins: the first odds forgotten, a drift of another size.
#[test]
fn a_wrong_drift_is_seen() {
    for (class, drift) in [
        ("benes-tanh", "mu*tanh(mu*x)"),
        ("benes-tanh", "0.75*tanh(0.75*x + c)"),
        ("benes-coth", "0.85/tanh(0.85*x)"),
    ] {
        for entry in entries(class) {
            assert!(!hides(&entry, drift, 1), "{class} hides its twin {drift}");
        }
    }
}
