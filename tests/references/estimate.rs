//! Means of a model's quantities with their standard errors.

use std::collections::BTreeMap;

use driftwright_runtime::{Grid, Run, Simulator};
use driftwright_tests::harness::checks::Check;
use driftwright_tests::harness::interpret::interpreter;
use driftwright_tests::harness::sums::{MeanPowers, mean_powers};

use crate::model::ModelText;

/// What a run of a model gave, by time and quantity.
pub(crate) struct Estimates {
    name: String,
    outputs: Vec<String>,
    powers: Vec<MeanPowers>,
}

/// Simulates a model with the interpreter.
pub(crate) fn estimate(
    name: &str,
    model: &ModelText,
    times: &[f64],
    steps: Option<usize>,
    paths: u64,
) -> Estimates {
    estimate_from(20_260_101, name, model, times, steps, paths)
}

/// As [`estimate`], with a seed.
pub(crate) fn estimate_from(
    seed: u64,
    name: &str,
    model: &ModelText,
    times: &[f64],
    steps: Option<usize>,
    paths: u64,
) -> Estimates {
    let identifier = name.to_lowercase().replace(['-', '.'], "_");
    let simulator = interpreter(name, &model.text(&identifier), &BTreeMap::new());
    let outputs: Vec<String> = simulator
        .shape()
        .outputs
        .iter()
        .map(ToString::to_string)
        .collect();
    let grid = Grid::new(times, steps).expect("a grid");
    let run = Run {
        paths,
        seed,
        ..Run::default()
    };
    let centres = vec![0.0; times.len() * outputs.len()];
    let powers = mean_powers(&simulator, &grid, &run, centres);
    Estimates {
        name: name.into(),
        outputs,
        powers,
    }
}

impl Estimates {
    /// The mean powers of a quantity at a time (an index).
    pub(crate) fn powers(&self, time: usize, quantity: &str) -> &MeanPowers {
        let index = self
            .outputs
            .iter()
            .position(|output| output == quantity)
            .unwrap_or_else(|| panic!("{}: no quantity {quantity}", self.name));
        &self.powers[time * self.outputs.len() + index]
    }

    /// Sample mean and standard error.
    pub(crate) fn mean(&self, time: usize, quantity: &str) -> (f64, f64) {
        self.powers(time, quantity).mean()
    }

    /// A test of a mean.
    pub(crate) fn check(&self, time: usize, quantity: &str, analytic: f64) -> Check {
        let (sample, std_error) = self.mean(time, quantity);
        Check {
            what: format!("{} {quantity}, time {time}", self.name),
            sample,
            analytic,
            std_error,
        }
    }

    /// A test of a variance; its standard error is that of the mean squared distance from the sample mean.
    pub(crate) fn variance_check(&self, time: usize, quantity: &str, analytic: f64) -> Check {
        let [m1, m2, m3, m4, ..] = self.powers(time, quantity).means;
        let sample = m2 - m1 * m1;
        let fourth = m4 - 4.0 * m1 * m3 + 6.0 * m1 * m1 * m2 - 3.0 * m1.powi(4);
        let count = self.powers(time, quantity).count;
        Check {
            what: format!("{} variance of {quantity}, time {time}", self.name),
            sample,
            analytic,
            std_error: ((fourth - sample * sample) / count).sqrt(),
        }
    }
}
