//! Commuting linear flows of the catalogue `exact` against its moments, drawn in one step and in several, with twins
//! that have one wrong term.

use std::collections::BTreeMap;
use std::fmt::Write;

use driftwright_runtime::{Grid, Run, Simulator};
use driftwright_tests::harness::checks::{Check, assert_family, threshold};
use driftwright_tests::harness::interpret::interpreter;
use driftwright_tests::harness::sums::mean_powers;

use crate::catalogue::{entries, number, text_of};

const PATHS: u64 = 500_000;

/// The model of an entry with the states x and y, and readouts of its second moments.
fn model(entry: &toml::Table, replaced: (&str, &str)) -> String {
    let mut text = String::from("[model]\nname = \"m\"\ndrivers = [\"W\"]\n[parameters]\n");
    let mut line = |line: String| writeln!(text, "{line}").expect("writing to a string");
    for (name, value) in entry["params"].as_table().expect("a table") {
        let range = text_of(&entry["param_domain"][name]);
        line(format!(
            "{name} = {{ value = {value}, range = \"{range}\" }}"
        ));
    }
    for state in ["x", "y"] {
        let drift = text_of(&entry["drift"][state]).replace(replaced.0, replaced.1);
        let noise = text_of(&entry["diffusion"][state]["W"]);
        line(format!(
            "[states.{state}]\ninitial = \"{}\"",
            entry["x0"][state]
        ));
        line(format!("drift = \"{drift}\"\ndiffusion = \"{noise}\""));
    }
    for (name, formula) in [
        ("xx", "x^2"),
        ("xy", "x*y"),
        ("yy", "y^2"),
        ("radius", "x^2 + y^2 - 1"),
    ] {
        line(format!("[readouts.{name}]\nformula = \"{formula}\""));
    }
    text
}

fn checks(entry: &toml::Table, replaced: (&str, &str), steps: usize) -> Vec<Check> {
    let id = text_of(&entry["id"]);
    let simulator = interpreter(id, &model(entry, replaced), &BTreeMap::new());
    assert!(!simulator.shape().approximate, "{id} is not moved exactly");
    let grid = Grid::new(&[number(&entry["T"])], Some(steps)).expect("a grid");
    let run = Run {
        paths: PATHS,
        seed: 45,
        ..Run::default()
    };
    let law = &entry["law"];
    let [x, y] = ["x", "y"].map(|s| number(&law["mean"][s]));
    let [vx, vy] = ["x", "y"].map(|s| number(&law["var"][s]));
    let mixed = number(&law["cov"]) + x * y;
    let expected = [x, y, vx + x * x, mixed, vy + y * y];
    let mut centres = expected.to_vec();
    centres.push(0.0);
    let powers = mean_powers(&simulator, &grid, &run, centres);
    if replaced.0.is_empty() {
        let [_, off, ..] = powers[5].means;
        assert!(off < 1e-26, "{id}: the circle is left by {}", off.sqrt());
    }
    let check = |(index, analytic): (usize, f64)| {
        let (sample, std_error) = powers[index].mean();
        Check {
            what: format!("{id}, {steps} steps, moment {index}"),
            sample,
            analytic,
            std_error,
        }
    };
    expected.into_iter().enumerate().map(check).collect()
}

#[test]
fn catalogue_moments_are_drawn_in_one_step_and_in_several() {
    let mut all = Vec::new();
    for entry in entries("commuting-linear") {
        for steps in [1, 6] {
            all.extend(checks(&entry, ("", ""), steps));
        }
    }
    assert_eq!(all.len(), 2 * 5, "values");
    assert_family(&all);
}

/// Twins: a tenth of Ito's correction is missing, or all of it.
#[test]
fn a_wrong_term_is_seen() {
    for entry in entries("commuting-linear") {
        for replaced in [("s^2", "0.9*s^2"), ("s^2", "0*s^2")] {
            let checks = checks(&entry, replaced, 1);
            let limit = threshold(checks.len());
            assert!(
                checks.iter().any(|c| !c.passes(limit)),
                "{replaced:?} hides"
            );
        }
    }
}
