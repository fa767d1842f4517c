//! Blocks of correlated drivers that are too large to be spelled out: one operation mixes their draws. A
//! step is linear in its draws, so that one step for each unit vector of draws gives its covariance, to be
//! held against the formulas.

use std::collections::BTreeMap;
use std::fmt::Write as _;

use driftwright::back::interpret::Interpreter;
use driftwright::pipeline::compile;
use driftwright::source::SourceFile;
use driftwright_runtime::random::Draws;
use driftwright_runtime::{ArithmeticClass, Fused, Generator, Lane, Simulator};

const STATES: usize = 19;
const RHO: f64 = 0.4;
const SIGMA: f64 = 0.3;
const LENGTH: f64 = 0.7;

/// States under drivers of which neighbours are correlated, each with its own rate of reversion.
fn model(drift: impl Fn(usize) -> String) -> String {
    let drivers: Vec<String> = (0..STATES).map(|i| format!("\"W{i}\"")).collect();
    let mut text = format!(
        "[model]\nname = \"block\"\ndrivers = [{}]\n[parameters]\nsigma = {SIGMA}\nrho = {RHO}\n[correlation]\n",
        drivers.join(", ")
    );
    for i in 1..STATES {
        writeln!(text, "W{}.W{i} = \"rho\"", i - 1).unwrap();
    }
    for i in 0..STATES {
        writeln!(
            text,
            "[states.X{i}]\ninitial = \"0\"\ndrift = \"{}\"\ndiffusion = {{ W{i} = \"sigma\" }}",
            drift(i)
        )
        .unwrap();
    }
    text
}

/// The states after a step from 0 with these draws, on one of the lanes.
fn step(simulator: &Interpreter, draws: &[f64]) -> Vec<f64> {
    let shape = simulator.shape();
    assert_eq!(shape.sources.len(), STATES);
    let mut states = vec![Lane::ZERO; shape.states];
    let noise: Vec<Lane> = draws.iter().map(|&draw| Lane::splat(draw)).collect();
    let mut values = vec![0.0; shape.step_values];
    let mut scratch = vec![Lane::ZERO; shape.step_scratch];
    simulator
        .step_values(0.0, LENGTH, &mut values)
        .expect("the covariance is one");
    let others = Draws::new(0, Generator::default(), ArithmeticClass::Fused, 0, 0);
    simulator.step::<Fused>(&values, &mut states, &noise, &others, &mut scratch);
    states.iter().map(|lane| lane[101]).collect()
}

fn assert_covariance(text: &str, expected: impl Fn(usize, usize) -> f64) {
    let compilation = compile(&SourceFile::new("block.toml", text));
    let program = compilation.compiled.expect("a sound model").program;
    assert_eq!(
        program.factors().len(),
        1,
        "one block, mixed by one operation"
    );
    let simulator = Interpreter::new(&program, &BTreeMap::new()).expect("sound parameters");
    let unit =
        |k: usize| -> Vec<f64> { (0..STATES).map(|i| f64::from(u8::from(i == k))).collect() };
    let columns: Vec<Vec<f64>> = (0..STATES).map(|k| step(&simulator, &unit(k))).collect();
    for i in 0..STATES {
        for j in 0..STATES {
            let covariance: f64 = columns.iter().map(|column| column[i] * column[j]).sum();
            let expected = expected(i, j);
            assert!(
                (covariance - expected).abs() < 1e-14,
                "{i} {j}: {covariance} for {expected}"
            );
        }
    }
}

fn correlation(i: usize, j: usize) -> f64 {
    match i.abs_diff(j) {
        0 => 1.0,
        1 => RHO,
        _ => 0.0,
    }
}

#[test]
fn brownian_motions() {
    let covariance = |i, j| SIGMA * SIGMA * correlation(i, j) * LENGTH;
    assert_covariance(&model(|_| "0".to_owned()), covariance);
}

/// The covariance of Ornstein-Uhlenbeck processes with rates `k_i`:
/// `sigma^2 rho_ij (1 - exp(-(k_i + k_j) t))/(k_i + k_j)` (Karatzas and Shreve 1991, section 5.6).
#[test]
fn ornstein_uhlenbeck_processes() {
    let covariance = |i: usize, j: usize| {
        let rate = (i + j + 2) as f64 / 10.0;
        SIGMA * SIGMA * correlation(i, j) * (1.0 - (-rate * LENGTH).exp()) / rate
    };
    assert_covariance(&model(|i| format!("-{}*X{i}/10", i + 1)), covariance);
}

#[test]
fn approximate_steps() {
    // Drifts that no coordinate makes linear: Euler's and Milstein's steps from 0 have the increments'
    // covariance where the coefficients at 0 are constant.
    let covariance = |i, j| SIGMA * SIGMA * correlation(i, j) * LENGTH;
    let text = model(|i| format!("-X{i}^3/(1 + X{i}^2)"));
    let text = text.replace(
        "= \"0\"\ndrift",
        "= \"0\"\nscheme = \"euler_maruyama\"\ndrift",
    );
    assert_covariance(&text, covariance);
}
