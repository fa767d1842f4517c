//! What `simulate` shows: sample statistics for people and for programs.

use driftwright_runtime::{ArithmeticClass, Fact, Failures, STREAM_VERSION};
use serde_json::{Map, Value, json};

use super::run::Settings;
use crate::model::Model;
use crate::report::Document;
use crate::report::document::{Align, Inline, Mark, Table, Text, code, words};
use crate::report::number::{grouped, significant, with_error};
use crate::scheme::Plan;

/// The quantiles that are reported, and their names.
pub(super) const LEVELS: [(f64, &str); 7] = [
    (0.01, "0.01"),
    (0.05, "0.05"),
    (0.25, "0.25"),
    (0.5, "0.5"),
    (0.75, "0.75"),
    (0.95, "0.95"),
    (0.99, "0.99"),
];

/// Sample statistics of one quantity; each series has one value a time.
#[derive(Clone, Debug, Default)]
pub(super) struct Quantity {
    /// Its name.
    pub(super) name: String,
    /// Means.
    pub(super) mean: Vec<f64>,
    /// Variances, dividing by n-1.
    pub(super) variance: Vec<f64>,
    /// Standard errors of the means.
    pub(super) std_error: Vec<f64>,
    /// Skewness of the sample as a population.
    pub(super) skewness: Vec<f64>,
    /// Excess kurtosis of the sample as a population.
    pub(super) excess_kurtosis: Vec<f64>,
    /// Smallest values.
    pub(super) minimum: Vec<f64>,
    /// Largest values.
    pub(super) maximum: Vec<f64>,
    /// Quantiles at [`LEVELS`].
    pub(super) quantiles: [Vec<f64>; 7],
}

/// A finished run.
pub(super) struct Sample {
    /// Paths that were run.
    pub(super) paths: u64,
    /// Index of the first.
    pub(super) first_path: u64,
    /// Observation times.
    pub(super) times: Vec<f64>,
    /// Quantities in file order.
    pub(super) quantities: Vec<Quantity>,
    /// Paths that went wrong.
    pub(super) failures: Failures,
    /// Arithmetic class that was used.
    pub(super) arithmetic: ArithmeticClass,
    /// Facts that hang on parameter values, and whether they hold at those of the run.
    pub(super) facts: Vec<Fact>,
}

/// What makes the run repeatable.
pub(super) fn manifest(sample: &Sample, settings: &Settings, model: &Model, plan: &Plan) -> Value {
    let schemes: Map<String, Value> = model
        .states
        .iter()
        .enumerate()
        .map(|(i, s)| {
            (
                s.name.clone(),
                plan.groups[plan.group_of(i)].scheme.name().into(),
            )
        })
        .collect();
    json!({
        "stream_version": STREAM_VERSION,
        "generator": "threefry2x64-20",
        "arithmetic": sample.arithmetic.to_string(),
        "scheme": schemes,
        "tool_version": env!("CARGO_PKG_VERSION"),
        "horizon": settings.horizon,
        "steps": settings.steps,
        "parameters": settings.parameters,
        "facts": checked_facts(&sample.facts),
    })
}

/// `simulate --format json`.
pub(super) fn json(sample: &Sample, settings: &Settings, model: &Model, plan: &Plan) -> Value {
    let quantities: Map<String, Value> = sample
        .quantities
        .iter()
        .map(|q| (q.name.clone(), quantity(q)))
        .collect();
    json!({
        "model": model.name,
        "paths": sample.paths,
        "first_path": sample.first_path,
        "seed": settings.seed,
        "times": sample.times,
        "failures": {
            "non_finite": sample.failures.non_finite,
            "left_domain": sample.failures.left_domain,
        },
        "quantities": quantities,
        "manifest": manifest(sample, settings, model, plan),
        "defaults": settings.defaults,
    })
}

fn quantity(q: &Quantity) -> Value {
    let quantiles: Map<String, Value> = LEVELS
        .iter()
        .zip(&q.quantiles)
        .map(|((_, name), values)| ((*name).to_owned(), json!(values)))
        .collect();
    json!({
        "mean": q.mean,
        "variance": q.variance,
        "std_error": q.std_error,
        "skewness": q.skewness,
        "excess_kurtosis": q.excess_kurtosis,
        "minimum": q.minimum,
        "maximum": q.maximum,
        "quantiles": quantiles,
    })
}

/// The summary for people.
pub(super) fn document(
    sample: &Sample,
    settings: &Settings,
    model: &Model,
    plan: &Plan,
) -> Document {
    let title = model.title.clone().unwrap_or_else(|| model.name.clone());
    let mut document = Document::new(&model.pool, title, settings.describe());
    let unit = model
        .time_unit
        .as_ref()
        .map(|u| format!(" {u}"))
        .unwrap_or_default();
    for (i, time) in sample.times.iter().enumerate() {
        document.section(format!("Time {}{unit}", significant(*time, 6)));
        document.table(table(sample, i));
    }
    document.section("The run");
    document.list(
        facts(sample, settings, model, plan)
            .into_iter()
            .map(words)
            .collect(),
    );
    document.list(fact_lines(&sample.facts));
    failures(&mut document, sample);
    document
}

fn table(sample: &Sample, time: usize) -> Table {
    let mut table = Table::new([
        ("quantity", Align::Left),
        ("mean", Align::Right),
        ("std dev", Align::Right),
        ("skew", Align::Right),
        ("1 %", Align::Right),
        ("5 %", Align::Right),
        ("median", Align::Right),
        ("95 %", Align::Right),
        ("99 %", Align::Right),
    ]);
    for q in &sample.quantities {
        let short = |value: f64| words(significant(value, 5));
        table.row([
            code(&q.name),
            words(with_error(q.mean[time], q.std_error[time])),
            short(q.variance[time].sqrt()),
            words(significant(q.skewness[time], 3)),
            short(q.quantiles[0][time]),
            short(q.quantiles[1][time]),
            short(q.quantiles[3][time]),
            short(q.quantiles[5][time]),
            short(q.quantiles[6][time]),
        ]);
    }
    table
}

fn facts(sample: &Sample, settings: &Settings, model: &Model, plan: &Plan) -> Vec<String> {
    let mut facts = Vec::new();
    if !settings.defaults.is_empty() {
        facts.push(settings.describe_defaults());
    }
    if sample.paths != settings.paths {
        facts.push(format!(
            "a part: paths {} to {}",
            grouped(sample.first_path),
            grouped(sample.first_path + sample.paths - 1)
        ));
    }
    if !settings.parameters.is_empty() {
        facts.push(format!("parameters {}", settings.describe_parameters()));
    }
    let schemes: Vec<String> = model
        .states
        .iter()
        .enumerate()
        .map(|(i, s)| format!("{} {}", s.name, plan.groups[plan.group_of(i)].scheme.name()))
        .collect();
    facts.push(format!("schemes {}", schemes.join(", ")));
    facts.push(format!(
        "stream version {STREAM_VERSION}, {} arithmetic, driftwright {}",
        sample.arithmetic,
        env!("CARGO_PKG_VERSION")
    ));
    facts
}

/// The facts that hang on parameter values, for programs.
pub(super) fn checked_facts(facts: &[Fact]) -> Vec<Value> {
    let entry =
        |f: &Fact| json!({ "statement": f.statement, "condition": f.condition, "holds": f.holds });
    facts.iter().map(entry).collect()
}

/// The facts that hang on parameter values, for people: what does not hold is a warning.
pub(super) fn fact_lines(facts: &[Fact]) -> Vec<Text> {
    let line = |f: &Fact| {
        let (mark, word) = if f.holds {
            (Mark::Good, "holds")
        } else {
            (Mark::Bad, "does not hold")
        };
        vec![
            Inline::Marked(mark, word.to_owned()),
            Inline::Words(" at these parameters: ".into()),
            Inline::Words(format!("{} (if and only if ", f.statement)),
            Inline::Code(f.condition.to_string()),
            Inline::Words(")".into()),
        ]
    };
    facts.iter().map(line).collect()
}

/// Paths that went wrong are never passed over in silence.
pub(super) fn failures(document: &mut Document, sample: &Sample) {
    let Failures {
        non_finite,
        left_domain,
        ..
    } = sample.failures;
    for (count, what) in [
        (non_finite, "came to a value that is not finite"),
        (left_domain, "left the domain"),
    ] {
        if count > 0 {
            document.list(vec![vec![
                Inline::Marked(Mark::Bad, grouped(count)),
                Inline::Words(format!(" of {} paths {what}", grouped(sample.paths))),
            ]]);
        }
    }
}
