//! Properties of any compiled model: its Rust parses, its paths are finite or counted.

use std::collections::BTreeMap;

use driftwright::back::interpret::Interpreter;
use driftwright::back::rust;
use driftwright::pipeline::Compiled;
use driftwright::program::Program;
use driftwright_runtime::collect::{PathArray, Paths};
use driftwright_runtime::{ArithmeticClass, Failures, Grid, Run, simulate};

/// Paths of a short run.
const PATHS: u64 = 24;

/// The value of a parameter that the model leaves open.
const OPEN: f64 = 0.7;

/// Spells the program as Rust, which must parse, and runs a few steps of it.
///
/// # Panics
/// Where the source does not parse, or a path that is not finite goes uncounted.
pub fn check(compiled: &Compiled) {
    let program = &compiled.program;
    let source = rust::generate_source(program);
    if let Err(error) = syn::parse_file(&source) {
        panic!("the Rust does not parse: {error}\n{source}");
    }
    let Ok(interpreter) = Interpreter::new(program, &values(program)) else {
        return;
    };
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
