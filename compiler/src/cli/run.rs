//! What `simulate` and `verify` share: settings with their defaults, parameter values, the grid.

use std::collections::BTreeMap;
use std::num::NonZero;

use driftwright_runtime::{ArithmeticClass, Grid, Run};

use super::Failure;
use super::args::RunArgs;
use crate::front::{composed, did_you_mean};
use crate::model::Model;
use crate::report::number::{grouped, significant};
use crate::scheme::Plan;

/// Paths where the caller names no number.
const DEFAULT_PATHS: u64 = 100_000;
/// End of the simulation where the caller names none.
const DEFAULT_HORIZON: f64 = 1.0;
/// Equal steps of an approximate scheme where the caller names no number.
const DEFAULT_STEPS: usize = 200;

/// Everything a run is made with, and which of it nobody asked for.
#[derive(Clone, Debug)]
pub(super) struct Settings {
    /// Number of paths of the whole run.
    pub(super) paths: u64,
    /// Seed.
    pub(super) seed: u64,
    /// End of the simulation.
    pub(super) horizon: f64,
    /// Observation times, increasing.
    pub(super) times: Vec<f64>,
    /// Whether the caller named the observation times.
    pub(super) times_given: bool,
    /// Equal steps of the horizon; none where the laws go from observation to observation.
    pub(super) steps: Option<usize>,
    /// Threads.
    pub(super) threads: usize,
    /// Arithmetic class asked for.
    pub(super) arithmetic: ArithmeticClass,
    /// Value of every parameter.
    pub(super) parameters: BTreeMap<String, f64>,
    /// Settings nobody asked for, as `name value`.
    pub(super) defaults: Vec<String>,
}

impl Settings {
    /// Settings from the command line; what it leaves open gets its default.
    pub(super) fn new(args: &RunArgs, model: &Model, plan: &Plan) -> Result<Self, Failure> {
        let mut defaults = Vec::new();
        let paths = args.paths.unwrap_or_else(|| {
            defaults.push(format!("{} paths", grouped(DEFAULT_PATHS)));
            DEFAULT_PATHS
        });
        let last = args.times.as_ref().and_then(|times| times.last().copied());
        let horizon = args.horizon.or(last).unwrap_or_else(|| {
            defaults.push(format!("horizon {DEFAULT_HORIZON}"));
            DEFAULT_HORIZON
        });
        let times = observation_times(args, horizon)?;
        let approximate = plan.groups.iter().any(|g| !g.is_exact());
        let steps = args.steps.or_else(|| {
            approximate.then(|| {
                defaults.push(format!("{DEFAULT_STEPS} steps"));
                DEFAULT_STEPS
            })
        });
        let seed = args.seed.unwrap_or_else(|| {
            defaults.push("seed 0".to_owned());
            0
        });
        Ok(Self {
            paths,
            seed,
            horizon,
            times,
            times_given: args.times.is_some(),
            steps,
            threads: args.threads.unwrap_or_else(available_threads),
            arithmetic: args.arithmetic,
            parameters: parameters(model, &args.set)?,
            defaults,
        })
    }

    /// The grid of the run.
    pub(super) fn grid(&self) -> Result<Grid, Failure> {
        Ok(Grid::new(&self.times, self.steps)?)
    }

    /// The run of all paths.
    pub(super) fn run(&self) -> Run<'static> {
        Run {
            paths: self.paths,
            seed: self.seed,
            threads: self.threads,
            arithmetic: self.arithmetic,
            ..Run::default()
        }
    }

    /// Says in one line what was simulated.
    pub(super) fn describe(&self) -> String {
        let steps = match self.steps {
            Some(1) => "one step".to_owned(),
            Some(n) => format!("{} equal steps", grouped(n as u64)),
            None => "exact steps from observation to observation".to_owned(),
        };
        format!(
            "{} paths to time {}, {steps}, seed {}",
            grouped(self.paths),
            significant(self.horizon, 6),
            self.seed
        )
    }

    /// The defaults in one line; empty where everything was given.
    pub(super) fn describe_defaults(&self) -> String {
        if self.defaults.is_empty() {
            return String::new();
        }
        format!("by default: {}", self.defaults.join(", "))
    }
}

impl Settings {
    /// The parameters in one line, `name = value`, in the order of their names.
    pub(super) fn describe_parameters(&self) -> String {
        let list: Vec<String> = self
            .parameters
            .iter()
            .map(|(name, value)| format!("{name} = {}", significant(*value, 6)))
            .collect();
        list.join(", ")
    }
}

/// A range of the paths of a run.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Part {
    /// Index of its first path.
    pub(super) first_path: u64,
    /// Number of its paths.
    pub(super) paths: u64,
}

impl Part {
    /// Part I of N of `paths` paths; all of them where no part is named. The parts are as equal as
    /// can be and cover the paths in order.
    pub(super) fn new(paths: u64, part: Option<(u64, u64)>) -> Result<Self, Failure> {
        let (index, of) = part.unwrap_or((1, 1));
        let bound = |i: u64| (u128::from(paths) * u128::from(i) / u128::from(of)) as u64;
        let (first_path, end) = (bound(index - 1), bound(index));
        if end == first_path {
            return Err(Failure(format!(
                "--part: part {index} of {of} of {paths} paths holds no path"
            )));
        }
        Ok(Self {
            first_path,
            paths: end - first_path,
        })
    }
}

fn available_threads() -> usize {
    std::thread::available_parallelism().map_or(1, NonZero::get)
}

/// The times to observe at: those named, which must not pass the horizon, or the horizon alone.
fn observation_times(args: &RunArgs, horizon: f64) -> Result<Vec<f64>, Failure> {
    let Some(times) = &args.times else {
        return Ok(vec![horizon]);
    };
    if let Some(pair) = times.windows(2).find(|pair| pair[1] <= pair[0]) {
        return Err(Failure(format!(
            "--times: {} follows {}; give the times in increasing order, each once",
            pair[1], pair[0]
        )));
    }
    match times.last() {
        Some(&last) if last > horizon => Err(Failure(format!(
            "--times: {last} lies beyond the horizon {horizon}; raise --horizon or leave it out"
        ))),
        Some(&last) if last < horizon => Err(Failure(format!(
            "--horizon: nothing is observed after {last}; add {horizon} to --times, or leave --horizon out"
        ))),
        _ => Ok(times.clone()),
    }
}

/// A value for every parameter: those of the command line, else the file's.
fn parameters(model: &Model, set: &[(String, f64)]) -> Result<BTreeMap<String, f64>, Failure> {
    let mut values = BTreeMap::new();
    for parameter in &model.parameters {
        if let Some(value) = &parameter.value {
            let value = model
                .pool
                .eval_f64(model.pool.number(value.clone()), &BTreeMap::new());
            values.insert(parameter.name.clone(), value.unwrap_or(f64::NAN));
        }
    }
    for (name, value) in set {
        let name = composed(name);
        if !model.parameters.iter().any(|p| p.name == name) {
            return Err(unknown(model, &name));
        }
        values.insert(name, *value);
    }
    let missing: Vec<&str> = model
        .parameters
        .iter()
        .map(|p| p.name.as_str())
        .filter(|name| !values.contains_key(*name))
        .collect();
    if missing.is_empty() {
        return Ok(values);
    }
    let options: Vec<String> = missing
        .iter()
        .map(|name| format!("--set {name}=VALUE"))
        .collect();
    let (noun, verb) = if missing.len() == 1 {
        ("parameter", "has")
    } else {
        ("parameters", "have")
    };
    Err(Failure(format!(
        "the {noun} `{}` {verb} no value in the file: give {}",
        missing.join("`, `"),
        options.join(" ")
    )))
}

fn unknown(model: &Model, name: &str) -> Failure {
    let names = model.parameters.iter().map(|p| p.name.as_str());
    let hint = match did_you_mean(name, names.clone()) {
        Some(hint) => hint,
        None if model.parameters.is_empty() => "it has none".to_owned(),
        None => format!("it has {}", names.collect::<Vec<_>>().join(", ")),
    };
    Failure(format!(
        "--set: model `{}` has no parameter `{name}`; {hint}",
        model.name
    ))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn parts_cover_the_paths_in_order() {
        let parts: Vec<Part> = (1..=7)
            .map(|i| Part::new(1000, Some((i, 7))).unwrap())
            .collect();
        let mut next = 0;
        for part in parts {
            assert_eq!(part.first_path, next);
            next += part.paths;
        }
        assert_eq!(next, 1000);
        assert!(Part::new(2, Some((1, 3))).is_err());
    }
}
