//! Throughput of generated code on one thread, and in the same run beside the same work in idiomatic NumPy
//! (`numpy_workloads.py`): exact steps of a geometric Brownian motion, an Ornstein-Uhlenbeck process and
//! a correlated pair, with mean and variance at the end.

use std::path::Path;
use std::process::Command;
use std::time::Instant;

use divan::Bencher;
use driftwright_runtime::collect::Moments;
use driftwright_runtime::{Grid, Run, Simulator, simulate};
use orchard_spot::OrchardSpot;
use river_spread::RiverSpread;
use twin_orchards::TwinOrchards;

include!(concat!(env!("OUT_DIR"), "/orchard_spot.rs"));
include!(concat!(env!("OUT_DIR"), "/river_spread.rs"));
include!(concat!(env!("OUT_DIR"), "/twin_orchards.rs"));

const PATHS: u64 = 200_000;
const STEPS: usize = 252;

/// The workloads under the names of the Python script.
fn seconds(workload: &str) -> f64 {
    match workload {
        "geometric_brownian_motion" => best_of_three(&orchard()),
        "ornstein_uhlenbeck" => best_of_three(&river()),
        _ => best_of_three(&twins()),
    }
}

fn orchard() -> OrchardSpot {
    OrchardSpot::new(orchard_spot::Parameters::default()).expect("admissible defaults")
}

fn river() -> RiverSpread {
    RiverSpread::new(river_spread::Parameters::default()).expect("admissible defaults")
}

fn twins() -> TwinOrchards {
    TwinOrchards::new(twin_orchards::Parameters::default()).expect("admissible defaults")
}

/// One run; the statistics come out so that nothing is optimised away.
fn run<S: Simulator>(simulator: &S, seed: u64) -> f64 {
    let grid = Grid::new(&[1.0], Some(STEPS)).expect("a grid");
    let run = Run {
        paths: PATHS,
        seed,
        threads: 1,
        ..Run::default()
    };
    let outcome = simulate(simulator, &grid, &run, Moments).expect("the run takes place");
    outcome.output[0][0].mean
}

fn best_of_three<S: Simulator>(simulator: &S) -> f64 {
    let time = |seed| {
        let begin = Instant::now();
        divan::black_box(run(simulator, seed));
        begin.elapsed().as_secs_f64()
    };
    (0..3).map(time).fold(f64::INFINITY, f64::min)
}

fn path_steps() -> divan::counter::ItemsCount {
    divan::counter::ItemsCount::new(PATHS * STEPS as u64)
}

#[divan::bench(sample_count = 5, sample_size = 1)]
fn geometric_brownian_motion(bencher: Bencher<'_, '_>) {
    let simulator = orchard();
    bencher.counter(path_steps()).bench(|| run(&simulator, 7));
}

#[divan::bench(sample_count = 5, sample_size = 1)]
fn ornstein_uhlenbeck(bencher: Bencher<'_, '_>) {
    let simulator = river();
    bencher.counter(path_steps()).bench(|| run(&simulator, 7));
}

#[divan::bench(sample_count = 5, sample_size = 1)]
fn correlated_pair(bencher: Bencher<'_, '_>) {
    let simulator = twins();
    bencher.counter(path_steps()).bench(|| run(&simulator, 7));
}

/// Seconds by workload from the Python script; none without Python or NumPy.
fn numpy() -> Option<serde_json::Value> {
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("benches/numpy_workloads.py");
    let output = Command::new("python3")
        .arg(script)
        .args([PATHS.to_string(), STEPS.to_string()])
        // One thread on either side.
        .envs(["OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS"].map(|name| (name, "1")))
        .output()
        .ok()?;
    serde_json::from_slice(&output.stdout).ok()
}

fn beside_numpy() {
    let Some(theirs) = numpy() else {
        println!("\nNumPy was not found: install it for python3 to see the comparison.");
        return;
    };
    let per_step = |seconds: f64| seconds * 1e9 / (PATHS * STEPS as u64) as f64;
    println!(
        "\n{PATHS} paths, {STEPS} exact steps, one thread, ns a path and step; NumPy {}",
        theirs["numpy"].as_str().unwrap_or("?")
    );
    println!(
        "{:<28}{:>12}{:>12}{:>9}",
        "workload", "driftwright", "NumPy", "ratio"
    );
    for workload in [
        "geometric_brownian_motion",
        "ornstein_uhlenbeck",
        "correlated_pair",
    ] {
        let (ours, other) = (
            seconds(workload),
            theirs[workload].as_f64().unwrap_or(f64::NAN),
        );
        println!(
            "{workload:<28}{:>12.1}{:>12.1}{:>9.1}",
            per_step(ours),
            per_step(other),
            other / ours
        );
    }
}

fn main() {
    divan::main();
    beside_numpy();
}
