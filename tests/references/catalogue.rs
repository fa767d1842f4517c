//! Entries of the catalogue `exact` as models, and their laws as tests of sampled paths.

use std::collections::BTreeMap;
use std::fmt::Write;

use driftwright_runtime::{Grid, Run, Simulator};
use driftwright_tests::harness::checks::{Check, threshold};
use driftwright_tests::harness::interpret::interpreter;
use driftwright_tests::harness::sums::mean_powers;

const PATHS: u64 = 500_000;

/// Entries of a class.
pub(crate) fn entries(class: &str) -> Vec<toml::Table> {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/reference/exact.toml");
    let text = std::fs::read_to_string(path).expect("the catalogue is there");
    let all: toml::Table = text.parse().expect("a table");
    let entries = all["sde"].as_array().expect("a list").iter();
    let tables = entries.map(|e| e.as_table().expect("a table").clone());
    tables
        .filter(|e| e["expect"]["class"].as_str() == Some(class))
        .collect()
}

/// The drift of an entry.
pub(crate) fn drift(entry: &toml::Table) -> &str {
    text_of(&entry["drift"][text_of(&entry["states"][0])])
}

/// Tests of an entry with this drift that fail: a twin must have some.
pub(crate) fn hides(entry: &toml::Table, drift: &str, steps: usize) -> bool {
    let checks = checks(entry, drift, steps);
    let limit = threshold(checks.len());
    checks.iter().all(|c| c.passes(limit))
}

/// A value as a text.
pub(crate) fn text_of(value: &toml::Value) -> &str {
    value.as_str().expect("a text")
}

/// A value, or the text of one, as a number.
pub(crate) fn number(value: &toml::Value) -> f64 {
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
         {}",
        entry["x0"][state],
        domain(entry)
    )
    .expect("writing to a string");
    for (index, point) in points(entry).iter().enumerate() {
        let formula = format!("max(sign({:?} - {state}), 0)", point.0);
        writeln!(text, "[readouts.below_{index}]\nformula = \"{formula}\"")
            .expect("writing to a string");
    }
    text
}

/// The domain: it is closed at 0 in the square-root class only.
fn domain(entry: &toml::Table) -> &'static str {
    match text_of(&entry["expect"]["class"]) {
        "cir" => "domain = \"[0, inf)\"\nat_edge = \"as_equation\"\n",
        "benes-coth" => "domain = \"(0, inf)\"\n",
        _ => "",
    }
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
pub(crate) fn checks(entry: &toml::Table, drift: &str, steps: usize) -> Vec<Check> {
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
