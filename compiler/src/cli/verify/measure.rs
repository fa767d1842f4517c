//! The runs behind the checks: once where every law is exact, else at two step lengths along the same
//! paths.

use driftwright_runtime::collect::Summary;
use driftwright_runtime::{Run, Simulator};

use super::expect::{Analyst, Expected, LEVELS, Statistic};
use super::judge::{Check, ROUNDING};
use super::targets::{Origin, Target, Targets};
use crate::back::interpret::Interpreter;
use crate::cli::run::Settings;
use crate::cli::sample::{Collected, Request, sample};
use crate::cli::{Failure, progress};
use crate::pipeline::Compiled;
use crate::program;
use crate::report::number::grouped;
use crate::symbolic::Expr;

/// An open claim's difference may be this large beside the quantity itself, from rounding.
const VANISHING: f64 = 1e-9;

/// What was simulated.
pub(super) struct Measured {
    pub(super) collected: Collected,
    /// Whether the second half of the outputs holds the model at half the step.
    coupled: bool,
}

/// Simulates the model with everything observed that the targets need.
pub(super) fn measure(
    compiled: &Compiled,
    targets: &Targets,
    settings: &Settings,
) -> Result<Measured, Failure> {
    let program = program::lower(&targets.model, &compiled.plan, &[])?;
    let interpreter = Interpreter::new(&program, &settings.parameters)?;
    let bar = progress::bar(
        settings.paths,
        &format!("verifying {}", compiled.model.name),
    );
    let run = Run {
        progress: Some(&bar),
        ..settings.run()
    };
    let coupled = interpreter.shape().approximate;
    let request = Request {
        levels: LEVELS.iter().map(|(level, _)| *level).collect(),
        pairs: if coupled {
            coupled_pairs(targets)
        } else {
            targets.pairs.clone()
        },
        coupled,
        writer: None,
    };
    let collected = sample(&interpreter, &settings.grid()?, &run, request)?;
    Ok(Measured { collected, coupled })
}

/// The pairs among the long steps' outputs, then the same among the halves'.
fn coupled_pairs(targets: &Targets) -> Vec<(usize, usize)> {
    let count = targets.outputs.len();
    let halves = targets.pairs.iter().map(|(i, j)| (i + count, j + count));
    targets.pairs.iter().copied().chain(halves).collect()
}

/// A sample's value with the standard error it estimates for itself.
struct Observed {
    value: f64,
    own_error: f64,
}

impl Measured {
    fn observed(&self, statistic: &Statistic, time: usize, shift: (usize, usize)) -> Observed {
        let summary = |output: &usize| &self.collected.moments[time][output + shift.0];
        match statistic {
            Statistic::Mean(output) => Observed {
                value: summary(output).mean,
                own_error: summary(output).std_error(),
            },
            Statistic::Variance(output) => {
                let s = summary(output);
                Observed {
                    value: s.variance(),
                    own_error: s.variance_std_error(),
                }
            }
            Statistic::Skewness(output) => Observed {
                value: summary(output).skewness(),
                own_error: f64::NAN,
            },
            Statistic::Covariance(pair) => {
                let c = &self.collected.covariances[time][pair + shift.1];
                Observed {
                    value: c.covariance(),
                    own_error: c.std_error(),
                }
            }
            Statistic::Quantile(output, level, _) => {
                let value = self.collected.quantiles.get(time, output + shift.0, *level);
                Observed {
                    value,
                    own_error: f64::NAN,
                }
            }
            Statistic::Vanishing(output, _) => {
                let s = summary(output);
                Observed {
                    value: largest(s),
                    own_error: f64::NAN,
                }
            }
        }
    }
}

/// Holds every target at every time against the sample. What cannot be tested comes back with the
/// reason; statistics without an analytic value are no targets and are passed over.
pub(super) fn checks(
    analyst: &Analyst<'_>,
    compiled: &Compiled,
    targets: &Targets,
    settings: &Settings,
    run: &Measured,
) -> (Vec<Check>, Vec<String>) {
    let judge = Judge {
        analyst,
        compiled,
        targets,
        settings,
        run,
    };
    let (mut checks, mut skipped) = (Vec::new(), Vec::new());
    for target in &targets.list {
        for (i, time) in settings
            .times
            .iter()
            .enumerate()
            .filter(|(_, time)| **time > 0.0)
        {
            match judge.check(target, i, *time) {
                Some(Ok(check)) => checks.push(check),
                Some(Err(reason)) if !skipped.contains(&reason) => skipped.push(reason),
                _ => {}
            }
        }
    }
    (checks, skipped)
}

struct Judge<'a> {
    analyst: &'a Analyst<'a>,
    compiled: &'a Compiled,
    targets: &'a Targets,
    settings: &'a Settings,
    run: &'a Measured,
}

impl Judge<'_> {
    fn check(&self, target: &Target, index: usize, time: f64) -> Option<Result<Check, String>> {
        let observed = self.run.observed(&target.statistic, index, (0, 0));
        let expected = self.expected(target, observed.value, index, time)?;
        let paths = self.settings.paths as f64;
        let statistic = name(&target.statistic);
        if paths < expected.paths_needed {
            return Some(Err(format!(
                "the {statistic} of {} needs {} paths before its error is nearly normal",
                target.quantity,
                grouped(expected.paths_needed.ceil() as u64)
            )));
        }
        let std_error = expected
            .unit_error
            .map_or(observed.own_error, |e| e / paths.sqrt());
        if std_error.is_nan() {
            return None;
        }
        let (source, claim) = (self.source(target), target.claim.clone());
        Some(Ok(Check {
            quantity: target.quantity.clone(),
            statistic,
            time,
            analytic: expected.value,
            sample: observed.value,
            std_error,
            bias: self.bias(target, index, observed.value),
            rounding: self.rounding(target, index, expected.value),
            source,
            claim,
        }))
    }

    fn expected(&self, target: &Target, near: f64, index: usize, time: f64) -> Option<Expected> {
        let known = |output: &usize| self.analyst.central(self.targets.outputs[*output], time);
        // What a claim says, with the error that analysis knows, where it does.
        let claimed = |value: Option<f64>, derived: Option<Expected>| {
            let value = value?;
            let unknown = Expected {
                value,
                unit_error: None,
                paths_needed: 0.0,
            };
            Some(Expected {
                value,
                ..derived.unwrap_or(unknown)
            })
        };
        let derived = match &target.statistic {
            Statistic::Mean(output) => known(output).map(|c| c.expected_mean()).or_else(|| {
                let formula = self.targets.outputs[*output];
                self.analyst.mean_alone(formula, time)
            }),
            Statistic::Variance(output) => known(output).map(|c| c.expected_variance()),
            Statistic::Skewness(output) => known(output).and_then(|c| c.expected_skewness()),
            Statistic::Covariance(pair) => {
                let (i, j) = self.targets.pairs[*pair];
                let (a, b) = (self.targets.outputs[i], self.targets.outputs[j]);
                let random = [a, b]
                    .iter()
                    .all(|e| self.analyst.central(*e, time).is_none_or(|c| c.is_random()));
                let value = self.analyst.covariance(a, b, time).filter(|_| random);
                value.map(|value| Expected {
                    value,
                    unit_error: None,
                    paths_needed: 0.0,
                })
            }
            Statistic::Quantile(_, level, law) => {
                self.analyst.quantile(law, LEVELS[*level].0, near, time)
            }
            Statistic::Vanishing(..) => None,
        };
        match &target.origin {
            Origin::Derived(_) => derived,
            Origin::Claimed(formula) => claimed(self.analyst.number(*formula, time), derived),
            Origin::Constant => claimed(self.analyst.at_start(self.formula(target)?), derived),
            Origin::Zero => {
                let Statistic::Vanishing(_, beside) = &target.statistic else {
                    return None;
                };
                let scale = largest(&self.run.collected.moments[index][*beside]);
                let unit_error = Some(VANISHING * scale * (self.settings.paths as f64).sqrt());
                Some(Expected {
                    value: 0.0,
                    unit_error,
                    paths_needed: 0.0,
                })
            }
        }
    }

    /// Rounding of a statistic: of first order in the values, of second for those that are squares.
    fn rounding(&self, target: &Target, index: usize, value: f64) -> f64 {
        let size = |output: usize| ROUNDING * self.run.collected.moments[index][output].mean.abs();
        let own = ROUNDING * value.abs();
        match &target.statistic {
            Statistic::Variance(output) => own + size(*output) * size(*output),
            Statistic::Covariance(pair) => {
                let (i, j) = self.targets.pairs[*pair];
                own + size(i) * size(j)
            }
            _ => own,
        }
    }

    fn formula(&self, target: &Target) -> Option<Expr> {
        match &target.statistic {
            Statistic::Mean(output) => Some(self.targets.outputs[*output]),
            _ => None,
        }
    }

    fn source(&self, target: &Target) -> String {
        match (&target.origin, &target.claim) {
            (Origin::Derived(source), _) => source.clone(),
            (_, Some(claim)) => format!("claim {claim}"),
            (_, None) => "claim".to_owned(),
        }
    }

    /// The estimated bias of a statistic at the steps asked for: from the halves, with the weak order
    /// that the schemes behind it have. None where all of them are exact.
    fn bias(&self, target: &Target, index: usize, value: f64) -> Option<f64> {
        if !self.run.coupled {
            return None;
        }
        let order = self.weak_order(target)?;
        let shift = (self.targets.outputs.len(), self.targets.pairs.len());
        let half = self.run.observed(&target.statistic, index, shift).value;
        Some((value - half) / (1.0 - (-order * std::f64::consts::LN_2).exp()))
    }

    /// The least weak order of the schemes behind a statistic; one where it is not known. None where
    /// every state behind it is stepped exactly.
    fn weak_order(&self, target: &Target) -> Option<f64> {
        let outputs = match &target.statistic {
            Statistic::Covariance(pair) => {
                let (i, j) = self.targets.pairs[*pair];
                vec![i, j]
            }
            Statistic::Mean(o)
            | Statistic::Variance(o)
            | Statistic::Skewness(o)
            | Statistic::Quantile(o, ..)
            | Statistic::Vanishing(o, _) => vec![*o],
        };
        let model = &self.compiled.model;
        let plan = &self.compiled.plan;
        let symbols = outputs
            .iter()
            .flat_map(|&o| model.pool.symbols_of(self.targets.outputs[o]));
        symbols
            .filter_map(|symbol| model.state_of(symbol))
            .map(|state| &plan.groups[plan.group_of(state)])
            .filter(|group| !group.is_exact())
            .map(|group| group.weak_order.map_or(1.0, |o| o.value()))
            .reduce(f64::min)
    }
}

/// The largest absolute value of a sample.
fn largest(summary: &Summary) -> f64 {
    summary.maximum.max(-summary.minimum)
}

/// The statistic's name in outputs.
fn name(statistic: &Statistic) -> &'static str {
    match statistic {
        Statistic::Mean(_) => "mean",
        Statistic::Variance(_) => "variance",
        Statistic::Skewness(_) => "skewness",
        Statistic::Covariance(_) => "covariance",
        Statistic::Quantile(_, level, _) => LEVELS[*level].1,
        Statistic::Vanishing(..) => "largest difference",
    }
}
