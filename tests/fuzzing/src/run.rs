//! Properties of any compiled model: its Rust parses, its paths are finite and in their domains, or counted.

use std::collections::BTreeMap;

use driftwright::back::interpret::Interpreter;
use driftwright::back::rust;
use driftwright::model::{Model, Parameter, State};
use driftwright::pipeline::Compiled;
use driftwright::program::Program;
use driftwright::symbolic::{Bound, Interval};
use driftwright_runtime::collect::{PathArray, Paths};
use driftwright_runtime::{ArithmeticClass, Failures, Grid, Run, simulate};

/// Paths of a short run.
const PATHS: u64 = 24;

/// How far rounding may take a value beyond an end: this much of one and of both.
const ROUNDING: f64 = 1e-12;

/// The value of a parameter that the model leaves open.
const OPEN: f64 = 0.7;

/// Spells the program as Rust, which must parse, and runs a few steps of it.
///
/// # Panics
/// Where the source does not parse, or a path that is not finite or outside its domain goes uncounted.
pub fn check(compiled: &Compiled) {
    let program = &compiled.program;
    let source = rust::generate_source(program);
    if let Err(error) = syn::parse_file(&source) {
        panic!("the Rust does not parse: {error}\n{source}");
    }
    let Ok(interpreter) = Interpreter::new(program, &values(program)) else {
        return;
    };
    let domains = domains(&compiled.model);
    let grids = [Grid::new(&[0.5, 1.0], Some(3)), Grid::new(&[0.25], None)];
    for grid in grids {
        let grid = grid.expect("a sound grid");
        for arithmetic in [ArithmeticClass::Fused, ArithmeticClass::Unfused] {
            let run = Run {
                paths: PATHS,
                seed: 7,
                threads: 1,
                arithmetic,
                ..Run::default()
            };
            if let Ok(outcome) = simulate(&interpreter, &grid, &run, Paths) {
                finite_or_counted(&outcome.output, outcome.failures);
                inside_or_counted(&outcome.output, outcome.failures, &domains);
            }
        }
    }
}

/// A value for each parameter without one, inside most ranges.
#[must_use]
pub fn values(program: &Program) -> BTreeMap<String, f64> {
    let open = program.parameters.iter().filter(|p| p.value.is_none());
    open.map(|p| (p.name.clone(), OPEN)).collect()
}

/// The ends of each state's domain at the values of a run; not a number where they have none.
fn domains(model: &Model) -> Vec<(f64, f64)> {
    let value = |p: &Parameter| {
        p.value
            .as_ref()
            .map_or(OPEN, |value| value.to_f64().value())
    };
    let at = model
        .parameters
        .iter()
        .map(|p| (p.symbol, value(p)))
        .collect();
    let end = |bound: Bound, infinite: f64| {
        let known = |end| model.pool.eval_f64(end, &at).unwrap_or(f64::NAN);
        bound.value().map_or(infinite, known)
    };
    let domain = |state: &State| {
        let Interval { lower, upper } = state.domain;
        (end(lower, f64::NEG_INFINITY), end(upper, f64::INFINITY))
    };
    model.states.iter().map(domain).collect()
}

/// The values of each path.
fn rows(paths: &PathArray) -> impl Iterator<Item = &[f64]> {
    paths.values.chunks(paths.layout.cells().max(1))
}

/// The paths with a value that is not finite are as many as were counted.
fn finite_or_counted(paths: &PathArray, failures: Failures) {
    let wrong = rows(paths).filter(|path| path.iter().any(|x| !x.is_finite()));
    assert_eq!(
        wrong.count() as u64,
        failures.non_finite,
        "paths that are not finite"
    );
}

/// The paths with a state outside the closure of its domain, by more than rounding, are no more than were
/// counted: a path may also leave and come back between two observations.
fn inside_or_counted(paths: &PathArray, failures: Failures, domains: &[(f64, f64)]) {
    let beyond =
        |x: f64, end: f64| x.is_finite() && x > end + ROUNDING * (1.0 + x.abs() + end.abs());
    let outside =
        |(&x, &(lower, upper)): (&f64, &(f64, f64))| beyond(x, upper) || beyond(-x, -lower);
    let left = |path: &&[f64]| {
        let mut observations = path.chunks(paths.layout.quantities.max(1));
        observations.any(|states| states.iter().zip(domains).any(outside))
    };
    let wrong = rows(paths).filter(left).count() as u64;
    assert!(
        wrong <= failures.left_domain,
        "{wrong} paths are outside a domain, {} are counted",
        failures.left_domain
    );
}
