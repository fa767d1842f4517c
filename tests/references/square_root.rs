//! Square-root processes of the catalogue `exact` against its distribution functions: drawn in one step and in
//! several, each way of drawing, with twins that have one wrong term.

use driftwright_tests::harness::checks::assert_family;

use crate::catalogue::{checks, drift, entries, hides};

#[test]
fn catalogue_laws_are_drawn_in_one_step_and_in_several() {
    let mut all = Vec::new();
    for entry in entries("cir") {
        for steps in [1, 6] {
            all.extend(checks(&entry, drift(&entry), steps));
        }
    }
    assert_eq!(all.len(), 2 * (8 * 5 + 1), "values");
    assert_family(&all);
}

/// Twins: the second-order term of Ito's rule forgotten or counted twice moves the dimension, a factor in time the decay.
#[test]
fn a_wrong_dimension_is_seen() {
    for (id, drift) in [
        ("pub-026", "kappa*(theta - r) + sigma^2/4"),
        ("pub-027", "a + c^2/4 - b*v"),
        ("pub-029", "d/(2*x)"),
        ("pub-030", "(al + c^2/2)/v - be*v"),
        ("pub-031", "k*v*(th - v) - s^2*v^2"),
        ("pub-032", "m*x + s^2/4"),
        ("pub-033", "(d + 1)*s^2*(1 + t/2)^2/4 - k*x"),
        ("pub-033", "d*s^2*(1 + t/2)^2/4 - k*x*(1 + t/2)"),
    ] {
        let entry = entries("cir")
            .into_iter()
            .find(|e| e["id"].as_str() == Some(id));
        let entry = entry.expect("an entry");
        assert!(!hides(&entry, drift, 1), "{id} hides its twin");
    }
}
