//! Cost of a path-step: `cargo bench -p driftwright-runtime`. Divide by paths times steps.

#[path = "../tests/models.rs"]
mod models;
use divan::Bencher;
use divan::counter::ItemsCount;
use driftwright_runtime::collect::Moments;
use driftwright_runtime::{ArithmeticClass, Generator, Grid, InstructionSet, Run, simulate};
use models::{Geometric, ORCHARD};

const PATHS: u64 = 20_000;
const STEPS: usize = 252;

fn main() {
    divan::main();
}

/// 252 exact steps, observed at the end, on one thread.
fn run(bencher: Bencher<'_, '_>, times: &[f64], steps: usize, run: Run<'_>) {
    let grid = Grid::new(times, Some(steps)).expect("a grid");
    let run = Run { threads: 1, ..run };
    bencher
        .counter(ItemsCount::new(run.paths * steps as u64))
        .bench(|| simulate::<Geometric, _>(&ORCHARD, &grid, &run, Moments).expect("a run"));
}

const CLASSES: [ArithmeticClass; 2] = [ArithmeticClass::Fused, ArithmeticClass::Unfused];

#[divan::bench(args = CLASSES)]
fn geometric_252_steps(bencher: Bencher<'_, '_>, arithmetic: ArithmeticClass) {
    let settings = Run {
        paths: PATHS,
        arithmetic,
        ..Run::default()
    };
    run(bencher, &[1.0], STEPS, settings);
}

#[divan::bench]
fn geometric_252_steps_baseline(bencher: Bencher<'_, '_>) {
    let settings = Run {
        paths: PATHS,
        instruction_set: Some(InstructionSet::Baseline),
        ..Run::default()
    };
    run(bencher, &[1.0], STEPS, settings);
}

#[divan::bench]
fn geometric_252_steps_philox(bencher: Bencher<'_, '_>) {
    let settings = Run {
        paths: PATHS,
        generator: Generator::Philox4x32,
        ..Run::default()
    };
    run(bencher, &[1.0], STEPS, settings);
}

#[divan::bench]
fn geometric_252_observations(bencher: Bencher<'_, '_>) {
    let times: Vec<f64> = (1..=STEPS).map(|i| i as f64 / STEPS as f64).collect();
    let settings = Run {
        paths: PATHS,
        ..Run::default()
    };
    run(bencher, &times, STEPS, settings);
}

#[divan::bench]
fn geometric_one_step(bencher: Bencher<'_, '_>) {
    let settings = Run {
        paths: 1_000_000,
        ..Run::default()
    };
    run(bencher, &[1.0], 1, settings);
}
