//! Square-root processes of the catalogue `exact` against its distribution functions: drawn in one step and in
//! several, each way of drawing, with twins that have one wrong term.

use std::collections::BTreeMap;
use std::fmt::Write;

use driftwright_runtime::{Grid, Run, Simulator};
use driftwright_tests::harness::checks::{Check, assert_family, threshold};
use driftwright_tests::harness::interpret::interpreter;
use driftwright_tests::harness::sums::mean_powers;

const PATHS: u64 = 500_000;

/// Entries of the class.
fn entries() -> Vec<toml::Table> {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/reference/exact.toml");
    let text = std::fs::read_to_string(path).expect("the catalogue is there");
    let all: toml::Table = text.parse().expect("a table");
    let entries = all["sde"].as_array().expect("a list").iter();
    let tables = entries.map(|e| e.as_table().expect("a table").clone());
    // The volatility of pub-033 depends on time.
    let drawn = |e: &toml::Table| {
        e["expect"]["class"].as_str() == Some("cir") && e["id"].as_str() != Some("pub-033")
    };
    tables.filter(drawn).collect()
}

fn text_of(value: &toml::Value) -> &str {
    value.as_str().expect("a text")
}

fn number(value: &toml::Value) -> f64 {
    match value.as_str() {
        Some(text) => text.parse().expect("a number"),
        None => value.as_float().expect("a number"),
    }
}

/// The model of an entry, with an indicator for each point of its distribution function.
fn model(entry: &toml::Table, drift: &str) -> String {
    let state = text_of(&entry["states"][0]);
    let mut text = String::from("[model]\nname = \"m\"\ndrivers = [\"W\"]\n[parameters]\n");
    for (name, value) in entry["params"].as_table().expect("a table") {
        let range = text_of(&entry["param_domain"][name]);
        let line = format!("{name} = {{ value = {value}, range = \"{range}\" }}");
        writeln!(text, "{line}").expect("writing to a string");
    }
    let noise = text_of(&entry["diffusion"][state]["W"]);
    write!(
        text,
        "[states.{state}]\ninitial = \"{}\"\ndrift = \"{drift}\"\ndiffusion = \"{noise}\"\n\
         domain = \"[0, inf)\"\nat_edge = \"as_equation\"\n",
        entry["x0"][state]
    )
    .expect("writing to a string");
    for (index, point) in points(entry).iter().enumerate() {
        let formula = format!("max(sign({:?} - {state}), 0)", point.0);
        writeln!(text, "[readouts.below_{index}]\nformula = \"{formula}\"")
            .expect("writing to a string");
    }
    text
}

/// The points of the distribution function, and just above 0 the atom, where there is one.
fn points(entry: &toml::Table) -> Vec<(f64, f64)> {
    let law = &entry["law"];
    let pair = |p: &toml::Value| (number(&p[0]), number(&p[1]));
    let points = law["cdf"].as_array().expect("a list").iter().map(pair);
    let atom = law.get("atom").map(|p| (1e-12, number(p)));
    points.chain(atom).collect()
}

/// Tests of mean, variance and distribution function of an entry with some drift.
fn checks(entry: &toml::Table, drift: &str, steps: usize) -> Vec<Check> {
    let (id, state) = (text_of(&entry["id"]), text_of(&entry["states"][0]));
    let simulator = interpreter(id, &model(entry, drift), &BTreeMap::new());
    assert!(!simulator.shape().approximate, "{id} is not drawn exactly");
    let grid = Grid::new(&[number(&entry["T"])], Some(steps)).expect("a grid");
    let run = Run {
        paths: PATHS,
        seed: 33,
        ..Run::default()
    };
    let law = &entry["law"];
    let (mean, variance) = (number(&law["mean"][state]), number(&law["var"][state]));
    let points = points(entry);
    let mut centres = vec![0.0; 1 + points.len()];
    centres[0] = mean;
    let powers = mean_powers(&simulator, &grid, &run, centres);
    let check = |what: String, analytic: f64, (sample, std_error): (f64, f64)| Check {
        what: format!("{id}, {steps} steps, {what}"),
        sample,
        analytic,
        std_error,
    };
    let [first, second, _, fourth, ..] = powers[0].means;
    let spread = ((fourth - second * second) / powers[0].count).sqrt();
    let mut found = vec![
        check("mean".into(), mean, powers[0].mean()),
        check(
            "variance".into(),
            variance,
            (second - first * first, spread),
        ),
    ];
    for (index, (x, p)) in points.into_iter().enumerate() {
        found.push(check(format!("cdf at {x}"), p, powers[1 + index].mean()));
    }
    found
}

#[test]
fn catalogue_laws_are_drawn_in_one_step_and_in_several() {
    let mut all = Vec::new();
    for entry in entries() {
        let drift = text_of(&entry["drift"][text_of(&entry["states"][0])]);
        for steps in [1, 6] {
            all.extend(checks(&entry, drift, steps));
        }
    }
    assert_eq!(all.len(), 2 * (7 * 5 + 1), "values");
    assert_family(&all);
}

/// Twins: the second-order term of Ito's rule forgotten or counted twice moves the dimension.
#[test]
fn a_wrong_dimension_is_seen() {
    for (id, drift) in [
        ("pub-026", "kappa*(theta - r) + sigma^2/4"),
        ("pub-027", "a + c^2/4 - b*v"),
        ("pub-029", "d/(2*x)"),
        ("pub-030", "(al + c^2/2)/v - be*v"),
        ("pub-031", "k*v*(th - v) - s^2*v^2"),
        ("pub-032", "m*x + s^2/4"),
    ] {
        let found = entries();
        let entry = found.iter().find(|e| e["id"].as_str() == Some(id));
        let checks = checks(entry.expect("an entry"), drift, 1);
        let limit = threshold(checks.len());
        assert!(
            checks.iter().any(|c| !c.passes(limit)),
            "{id} hides its twin"
        );
    }
}
