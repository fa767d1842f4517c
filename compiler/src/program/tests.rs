//! Lowering, the interpreter and the generated source on sketches.

use std::collections::BTreeMap;

use driftwright_runtime::random::Draws;
use driftwright_runtime::{ArithmeticClass, Generator, Lane, Simulator, Unfused};

use super::sketch::Sketch;
use super::{Program, lower};
use crate::back::interpret::Interpreter;
use crate::scheme::{Component, EdgeRule, RowNoise, StateStep};
use crate::symbolic::Interval;

/// A geometric Brownian motion through its logarithm.
fn geometric() -> Sketch {
    let mut sketch = Sketch::new(&["mu", "sigma"]);
    sketch.symbols(&["S"]);
    sketch
        .model
        .pool
        .symbol("u_S", crate::symbolic::SymbolKind::Auxiliary);
    let domain = sketch.positive();
    let through = Some(("log(S)", "exp(u_S)"));
    let state = sketch.state("S", "mu - sigma^2/2", ["sigma", "0"], domain, through);
    sketch.component(Component::Increment { driver: 0 }, "W");
    sketch.exact(
        &[state],
        &[&["0"]],
        &["mu - sigma^2/2"],
        &[["sigma", "0"]],
        &[RowNoise::Increments],
    );
    sketch.readout("log_S", "log(S)");
    sketch.readout("call", "exp(-mu*t)*max(S - 1, 0)");
    sketch
}

fn program(sketch: &Sketch) -> Program {
    lower(&sketch.model, &sketch.plan, &[]).expect("a small program")
}

/// One step of a simulator from its start, every lane with the same draws, and what is observed then.
fn one_step(program: &Program, draws: &[f64], length: f64) -> (Vec<f64>, Vec<f64>) {
    let simulator = Interpreter::new(program, &BTreeMap::new()).expect("the parameters are sound");
    let shape = simulator.shape();
    let mut start = vec![0.0; shape.states];
    simulator.start(&mut start);
    let mut states: Vec<Lane> = start.iter().map(|&value| Lane::splat(value)).collect();
    let noise: Vec<Lane> = draws.iter().map(|&draw| Lane::splat(draw)).collect();
    let mut values = vec![0.0; shape.step_values];
    let mut scratch = vec![Lane::ZERO; shape.step_scratch.max(shape.observation_scratch)];
    simulator
        .step_values(0.0, length, &mut values)
        .expect("the coefficients exist");
    let others = Draws::new(0, Generator::default(), ArithmeticClass::Unfused, 0, 0);
    simulator.step::<Unfused>(&values, &mut states, &noise, &others, &mut scratch);
    let mut outputs = vec![Lane::ZERO; shape.outputs.len()];
    let mut values = vec![0.0; shape.observation_values];
    simulator
        .observation_values(length, &mut values)
        .expect("the coefficients exist");
    simulator.observe::<Unfused>(&values, &states, &mut outputs, &mut scratch);
    let first = |lanes: Vec<Lane>| lanes.iter().map(|lane| lane.0[17]).collect();
    (first(states), first(outputs))
}

#[test]
fn geometric_brownian_motion_is_one_multiply_add_and_one_sum() {
    let program = program(&geometric());
    let listing = program.to_string();
    let lanes = listing
        .split("step lane:")
        .nth(1)
        .and_then(|rest| rest.split("observation lane:").next());
    let operations = lanes.map(|text| text.lines().filter(|l| l.starts_with("  %")).count());
    assert_eq!(
        operations,
        Some(4),
        "state, draw, multiply-add, sum:\n{listing}"
    );
    // The logarithm is the stored coordinate: only the price itself takes an exponential.
    assert_eq!(listing.matches("= exp").count(), 2, "{listing}");
    let (before, rest) = listing.split_once("\nlaw:").expect("a section");
    let (law, after) = rest.split_once("step lane:").expect("a section");
    assert!(
        !before.contains("= ln") && !after.contains("= ln"),
        "{listing}"
    );
    // The law of the next price is given a price.
    assert_eq!(law.matches("= ln").count(), 1, "{listing}");
}

#[test]
fn geometric_brownian_motion_steps_by_its_law() {
    let (draw, length) = (0.7, 0.25);
    let (states, outputs) = one_step(&program(&geometric()), &[draw], length);
    let expected = (0.5 - 0.125) * length + 0.5 * 0.5 * draw;
    assert!((states[0] - expected).abs() < 1e-15);
    assert!((outputs[0] - expected.exp()).abs() < 1e-15);
    assert_eq!(outputs[1], states[0]);
    let call = (-0.5 * length).exp() * (expected.exp() - 1.0).max(0.0);
    assert!((outputs[2] - call).abs() < 1e-15);
}

#[test]
fn correlated_milstein_matches_the_formula() {
    let mut sketch = Sketch::new(&["rho", "k"]);
    let real = Interval::REAL;
    sketch.symbols(&["X", "Y"]);
    let x = sketch.state("X", "k - X", ["X", "0"], real, None);
    let y = sketch.state("Y", "0", ["0", "X*Y"], sketch.positive(), None);
    sketch.increments();
    let step =
        |sketch: &Sketch, state, drift, diffusion: [&str; 2], milstein: (usize, usize, &str)| {
            StateStep {
                state,
                drift: sketch.formula(drift),
                diffusion: diffusion.map(|b| sketch.formula(b)).to_vec(),
                milstein: vec![(milstein.0, milstein.1, sketch.formula(milstein.2))],
                areas: Vec::new(),
                implicit: None,
                taming: None,
                taylor: None,
                lower: None,
                upper: None,
            }
        };
    let first = step(&sketch, x, "k - X", ["X", "0"], (0, 0, "X/2"));
    let second = step(&sketch, y, "0", ["0", "X*Y"], (0, 1, "X*Y/2"));
    sketch.stepped(first);
    sketch.stepped(second);
    let (z, h, rho) = ([0.3, -1.1], 0.01_f64, 0.5_f64);
    let (states, _) = one_step(&program(&sketch), &z, h);
    let dw = h.sqrt() * z[0];
    let db = h.sqrt() * (rho * z[0] + (1.0 - rho * rho).sqrt() * z[1]);
    let expected_x = 1.0 + (0.5 - 1.0) * h + dw + 0.5 * (dw * dw - h);
    let expected_y = 1.0 + db + 0.5 * (dw * db - rho * h);
    assert!(
        (states[0] - expected_x).abs() < 1e-15,
        "{} {expected_x}",
        states[0]
    );
    assert!(
        (states[1] - expected_y).abs() < 1e-15,
        "{} {expected_y}",
        states[1]
    );
    // X has no bounded domain, Y is watched: nothing has left.
    assert_eq!(states[2], 0.0);
    let (states, _) = one_step(&program(&sketch), &[0.0, -20.0], 1.0);
    assert!(states[1] <= 0.0 && states[2] == 1.0);
}

#[test]
fn a_coupled_pair_takes_its_transition_from_the_matrix_exponential() {
    // A mean-reverting rate and its integral (Vasicek 1977): variance of the integral over a step.
    let mut sketch = Sketch::new(&["k", "s"]);
    let r = sketch.state("r", "-k*r", ["s", "0"], Interval::REAL, None);
    let i = sketch.state("I", "r", ["0", "0"], Interval::REAL, None);
    for (state, source) in [(r, "law:r"), (i, "law:I")] {
        sketch.component(Component::Convolution { group: 0, state }, source);
    }
    let noise = [RowNoise::Convolution, RowNoise::Convolution];
    sketch.exact(
        &[r, i],
        &[&["-k", "0"], &["1", "0"]],
        &["0", "0"],
        &[["s", "0"], ["0", "0"]],
        &noise,
    );
    let (k, s, h) = (0.5_f64, 0.5_f64, 2.0_f64);
    let program = program(&sketch);
    let decay = (-k * h).exp();
    let (mean, _) = one_step(&program, &[0.0, 0.0], h);
    assert!((mean[0] - decay).abs() < 1e-14);
    assert!((mean[1] - (1.0 + (1.0 - decay) / k)).abs() < 1e-14);
    let (first, _) = one_step(&program, &[1.0, 0.0], h);
    let (second, _) = one_step(&program, &[0.0, 1.0], h);
    let deviations = [
        first[0] - mean[0],
        first[1] - mean[1],
        second[0] - mean[0],
        second[1] - mean[1],
    ];
    let variance_r = s * s * (1.0 - decay * decay) / (2.0 * k);
    let variance_i =
        s * s / (k * k) * (h - 2.0 * (1.0 - decay) / k + (1.0 - decay * decay) / (2.0 * k));
    let covariance = s * s / (2.0 * k * k) * (1.0 - decay) * (1.0 - decay);
    assert!((deviations[0].powi(2) + deviations[2].powi(2) - variance_r).abs() < 1e-14);
    assert!((deviations[1].powi(2) + deviations[3].powi(2) - variance_i).abs() < 1e-13);
    assert!(
        (deviations[0] * deviations[1] + deviations[2] * deviations[3] - covariance).abs() < 1e-13
    );
}

#[test]
fn closed_ends_absorb_and_reflect() {
    let mut sketch = Sketch::new(&["k"]);
    sketch.symbols(&["X", "Y"]);
    let x = sketch.state("X", "0", ["1", "0"], Interval::REAL, None);
    let y = sketch.state("Y", "0", ["1", "0"], Interval::REAL, None);
    sketch.component(Component::Increment { driver: 0 }, "W");
    let zero = sketch.model.pool.zero();
    for (state, lower) in [
        (x, EdgeRule::Absorb { end: zero }),
        (y, EdgeRule::Reflect { end: zero }),
    ] {
        let diffusion = vec![sketch.model.pool.one(), zero];
        let step = StateStep {
            state,
            drift: zero,
            diffusion,
            milstein: Vec::new(),
            areas: Vec::new(),
            implicit: None,
            taming: None,
            taylor: None,
            lower: Some(lower),
            upper: None,
        };
        sketch.stepped(step);
    }
    let (states, _) = one_step(&program(&sketch), &[-3.0], 1.0);
    assert_eq!(states[..2], [0.0, 2.0]);
    let (states, _) = one_step(&program(&sketch), &[0.5], 1.0);
    assert_eq!(states[..2], [1.5, 1.5]);
}

#[test]
fn generated_source_is_commented_and_formatted() {
    let source = crate::back::rust::generate_source(&program(&geometric()));
    assert!(!source.contains("__note"), "{source}");
    assert!(
        source.contains("// Constant part of the drift of log(S): mu - sigma^2/2."),
        "{source}"
    );
    assert!(source.contains("pub mod sketch {"), "{source}");
}
