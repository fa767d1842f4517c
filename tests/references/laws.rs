//! Transition laws in scope (reference B): the plan must be exact where the law is one of ours, and the paths must have
//! the published mean, variance, higher moments, distribution function and quantiles.

use driftwright_tests::harness::checks::{Check, assert_family};
use driftwright_tests::harness::interpret::compiled;
use driftwright_tests::harness::reference::{Case, Reference};

use crate::estimate::{Estimates, estimate};
use crate::model::ModelText;

const PATHS: u64 = 1_000_000;

/// Families with one state that have an exact law now, and what their state needs besides its equation.
const SCALAR: [(&str, &str); 12] = [
    ("arithmetic-bm", ""),
    ("geometric-bm", "domain = \"(0, inf)\""),
    ("ornstein-uhlenbeck", ""),
    ("exponential-ou", "domain = \"(0, inf)\""),
    (
        "explicit-logit",
        "domain = \"(0, 1)\"\nthrough = \"log(X/(1 - X))\"",
    ),
    ("explicit-sinh", "through = \"asinh(X)\""),
    (
        "explicit-tanh",
        "domain = \"(-1, 1)\"\nthrough = \"log((1 + X)/(1 - X))/2\"",
    ),
    ("integrated-ou", ""),
    (
        "square-root",
        "domain = \"[0, inf)\"\nat_edge = \"as_equation\"",
    ),
    (
        "squared-bessel",
        "domain = \"[0, inf)\"\nat_edge = \"as_equation\"",
    ),
    ("bessel", "domain = \"[0, inf)\"\nat_edge = \"as_equation\""),
    ("cev", "domain = \"[0, inf)\"\nat_edge = \"absorb\""),
];

/// The equations of a case.
pub(crate) fn model(case: &Case, more: &str) -> ModelText {
    let texts = |name: &str| -> Vec<String> {
        let list = case.entry(name).as_array().expect("a list");
        let text = |v: &toml::Value| v.as_str().expect("a text").to_string();
        list.iter().map(text).collect()
    };
    let states = texts("states");
    let starts = case.entry("x0").as_array().expect("a list");
    let rows = case.entry("diffusion").as_array().expect("a matrix");
    let drivers = ["W1", "W2"];
    let columns = rows[0].as_array().expect("a row").len();
    let mut model = ModelText::new(&drivers[..columns]).parameters_of(case);
    if let Some(matrix) = case.params.get("corr").and_then(toml::Value::as_array) {
        let rho = driftwright_tests::harness::values::number(&matrix[0][1]);
        model = model.correlated(drivers[0], drivers[1], rho);
    }
    for (index, drift) in texts("drift").iter().enumerate() {
        let row = rows[index].as_array().expect("a row");
        let entries: Vec<(&str, &str)> = drivers
            .iter()
            .zip(row)
            .map(|(driver, f)| (*driver, f.as_str().expect("a formula")))
            .filter(|(_, f)| f.parse() != Ok(0.0))
            .collect();
        // Which law a power of the state has hangs on the exponent, so that it stands there as a number.
        let power = |f: &str| match case.params.get("beta") {
            Some(beta) => f.replace("^beta", &format!("^{beta}")),
            None => f.to_owned(),
        };
        let entries: Vec<(&str, String)> =
            entries.into_iter().map(|(d, f)| (d, power(f))).collect();
        let entries: Vec<(&str, &str)> = entries.iter().map(|(d, f)| (*d, f.as_str())).collect();
        let start = starts[index].to_string();
        model = model.state(&states[index], &start, drift, &entries, more);
    }
    model
}

/// The quantity without its argument, and the state it is of.
pub(crate) fn of_state(quantity: &str) -> (&str, Option<&str>) {
    match quantity.split_once('(') {
        Some((name, rest)) => (name, Some(rest.trim_end_matches(')'))),
        None => (quantity, None),
    }
}

/// Adds an indicator per value of a distribution function or quantile; its mean is the probability.
fn with_indicators(case: &Case, mut model: ModelText) -> ModelText {
    for (index, check) in case.check.iter().enumerate() {
        let (kind, state) = of_state(&check.quantity);
        if let Some(formula) = expectation(case, &check.quantity) {
            model = model.readout(&format!("expected_{index}"), &formula);
            continue;
        }
        let level = match kind {
            "cdf" => check.level(),
            "quantile" | "median" => check.value,
            _ => continue,
        };
        let state = state.unwrap_or("X");
        let name = format!("below_{index}");
        model = model.readout(&name, &format!("max(sign(({level:?}) - {state}), 0)"));
    }
    if case.family == "integrated-ou" {
        model = model.derived("bond", "exp(-I)");
    }
    model
}

/// The formula whose mean a quantity of a square-root process or its kin is.
fn expectation(case: &Case, quantity: &str) -> Option<String> {
    let kin = ["square-root", "squared-bessel", "bessel", "cev"];
    if !kin.contains(&case.family.as_str()) {
        return None;
    }
    if quantity.starts_with("P(absorbed") {
        return Some("max(sign(1e-12 - X), 0)".into());
    }
    let inside = quantity.strip_prefix("E[")?.strip_suffix(']')?;
    Some(inside.to_owned())
}

/// Tests for one value; none for quantities that are not of one time or not in scope.
fn checks_of(case: &Case, paths: &Estimates, index: usize) -> Option<Check> {
    let check = &case.check[index];
    let (kind, state) = of_state(&check.quantity);
    let state = state.unwrap_or("X");
    let indicator = format!("below_{index}");
    if expectation(case, &check.quantity).is_some() {
        // Fewer than ten paths expected are too few for a normal error.
        let rare = check.value.abs() * (PATHS as f64) < 10.0;
        return (!rare).then(|| paths.check(0, &format!("expected_{index}"), check.value));
    }
    match kind {
        "mean" => Some(paths.check(0, state, check.value)),
        "var" => Some(paths.variance_check(0, state, check.value)),
        "cdf" => Some(paths.check(0, &indicator, check.value)),
        "quantile" => Some(paths.check(0, &indicator, check.level())),
        "median" => Some(paths.check(0, &indicator, 0.5)),
        "E[exp" if case.family == "integrated-ou" => Some(paths.check(0, "bond", check.value)),
        _ => None,
    }
}

/// Every case in scope, with what its states need.
pub(crate) fn in_scope(reference: &Reference) -> impl Iterator<Item = (&Case, &'static str)> {
    reference.case.iter().filter_map(|case| {
        if case.family == "multivariate-ou" {
            return Some((case, ""));
        }
        let row = SCALAR.iter().find(|(family, _)| *family == case.family)?;
        Some((case, row.1))
    })
}

#[test]
fn paths_have_the_laws_of_the_literature() {
    let reference = Reference::load("B");
    let mut checks = Vec::new();
    for (case, more) in in_scope(&reference) {
        let time = driftwright_tests::harness::values::number(case.entry("t"));
        let model = with_indicators(case, model(case, more));
        let paths = estimate(&case.id, &model, &[time], None, PATHS);
        checks.extend((0..case.check.len()).filter_map(|i| checks_of(case, &paths, i)));
    }
    assert_eq!(checks.len(), 158, "values in scope");
    assert_family(&checks);
}

#[test]
fn plans_in_scope_are_exact() {
    let reference = Reference::load("B");
    let mut seen = 0;
    for (case, more) in in_scope(&reference) {
        let name = case.id.to_lowercase().replace('-', "_");
        let compiled = compiled(&case.id, &model(case, more).text(&name));
        for group in &compiled.plan.groups {
            assert!(group.is_exact(), "{}: {:?}", case.id, group.reasons);
        }
        seen += 1;
    }
    assert_eq!(seen, 23, "cases in scope");
}
