//! The verification for people, on one screen, and for programs.

use serde_json::{Value, json};

use super::Verification;
use super::judge::{Check, FAMILY_ERROR};
use crate::analysis::claims::Verdict;
use crate::cli::summary;
use crate::model::Model;
use crate::pipeline::Compiled;
use crate::report::document::{Align, Inline, Mark, Score, Scores, Table, Text, code, words};
use crate::report::number::{grouped, significant, with_error};
use crate::report::{self, Document};

/// Rows of checks that a screen has room for.
const SCREEN: usize = 20;

/// `verify --format json`.
pub(super) fn json(verification: &Verification, compiled: &Compiled) -> Value {
    let settings = &verification.settings;
    let checks: Vec<Value> = verification
        .checks
        .iter()
        .map(|c| check(c, verification.threshold))
        .collect();
    let claims: serde_json::Map<String, Value> = compiled
        .claims
        .iter()
        .map(|c| (c.name.clone(), c.verdict.name().into()))
        .collect();
    let failures = verification.run.collected.failures;
    json!({
        "model": compiled.model.name,
        "passed": verification.passed,
        "paths": settings.paths,
        "seed": settings.seed,
        "steps": settings.steps,
        "arithmetic": verification.run.collected.arithmetic.to_string(),
        "parameters": settings.parameters,
        "defaults": settings.defaults,
        "family_error": FAMILY_ERROR,
        "threshold": verification.threshold,
        "failures": { "non_finite": failures.non_finite, "left_domain": failures.left_domain },
        "claims": claims,
        "checks": checks,
        "not_tested": verification.skipped,
        "facts": summary::checked_facts(&verification.facts),
    })
}

fn check(check: &Check, threshold: f64) -> Value {
    json!({
        "quantity": check.quantity,
        "statistic": check.statistic,
        "time": check.time,
        "analytic": check.analytic,
        "sample": check.sample,
        "std_error": check.std_error,
        "z": check.z(),
        "bias": check.bias,
        "passed": check.passed(threshold),
        "source": check.source,
        "claim": check.claim,
    })
}

/// Derivation, methods, claims, simulation and checks on one screen.
pub(super) fn document(verification: &Verification, compiled: &Compiled) -> Document {
    let model = &compiled.model;
    let title = model.title.clone().unwrap_or_else(|| model.name.clone());
    let mut document = Document::new(&model.pool, title, verification.settings.describe());
    derivation(&mut document, compiled);
    document.section("Sample against analytic values");
    document.table(table(verification, model, &shown(verification)));
    document.list(remarks(verification));
    document.paragraph(conclusion(verification, compiled));
    document
}

/// The evidence for a reviewer, `--report`: the verdict first, then every check.
pub(super) fn evidence(verification: &Verification, compiled: &Compiled) -> Document {
    let model = &compiled.model;
    let name = model.title.clone().unwrap_or_else(|| model.name.clone());
    let title = format!("Verification: {name}");
    let mut document = Document::new(&model.pool, title, verification.settings.describe());
    document.paragraph(conclusion(verification, compiled));
    document.section("Checks at a glance");
    let label = |c: &Check| {
        format!(
            "{} {} at {}",
            c.quantity,
            c.statistic,
            significant(c.time, 4)
        )
    };
    let points = verification.checks.iter().map(|c| Score {
        label: label(c),
        z: c.z(),
        passed: c.passed(verification.threshold),
    });
    document.scores(Scores {
        threshold: verification.threshold,
        points: points.collect(),
    });
    document.section("Sample against analytic values");
    let all: Vec<&Check> = verification.checks.iter().collect();
    document.table(table(verification, model, &all));
    document.list(remarks(verification));
    derivation(&mut document, compiled);
    document
}

fn derivation(document: &mut Document, compiled: &Compiled) {
    let (model, dynamics) = (&compiled.model, &compiled.dynamics);
    document.section("Derivation");
    let mut lines = report::state_equations(model, &dynamics.states);
    lines.extend(report::derived_summary(model, &dynamics.derived));
    document.equations(lines);
    document.section("Method");
    document.table(report::method_table(model, &compiled.plan));
    if !model.claims.is_empty() {
        document.section("Claims");
        document.table(report::claim_table(model, &compiled.claims));
    }
}

fn table(verification: &Verification, model: &Model, checks: &[&Check]) -> Table {
    let unit = model
        .time_unit
        .as_ref()
        .map_or("time".to_owned(), |u| format!("time ({u})"));
    let approximate = verification.checks.iter().any(|c| c.bias.is_some());
    let mut columns = vec![
        ("quantity", Align::Left),
        ("statistic", Align::Left),
        (unit.as_str(), Align::Right),
        ("analytic", Align::Right),
        ("sample", Align::Right),
    ];
    if approximate {
        columns.push(("bias", Align::Right));
    }
    columns.extend([("z", Align::Right), ("source", Align::Left)]);
    let mut table = Table::new([]);
    table.columns = columns
        .into_iter()
        .map(|(title, align)| report::document::Column {
            title: title.to_owned(),
            align,
        })
        .collect();
    table.rows = checks
        .iter()
        .map(|c| row(c, verification.threshold, approximate))
        .collect();
    table
}

/// The checks that a screen has room for: where there are too many, those that fail, those of claims,
/// and of the rest the means and, while they fit, the variances.
fn shown(verification: &Verification) -> Vec<&Check> {
    let keep = |statistics: &[&str]| -> Vec<&Check> {
        let first = |c: &&Check| {
            !c.passed(verification.threshold)
                || c.claim.is_some()
                || statistics.contains(&c.statistic)
        };
        verification.checks.iter().filter(first).collect()
    };
    let all: Vec<&Check> = verification.checks.iter().collect();
    [all, keep(&["mean", "variance"])]
        .into_iter()
        .find(|list| list.len() <= SCREEN)
        .unwrap_or_else(|| keep(&["mean"]))
}

fn row(check: &Check, threshold: f64, approximate: bool) -> Vec<Text> {
    let mark = if check.passed(threshold) {
        Mark::Good
    } else {
        Mark::Bad
    };
    let z = format!("{:+.2}", check.z());
    let z = if check.passed(threshold) {
        z
    } else {
        format!("{z} FAILS")
    };
    let mut cells = vec![
        code(&check.quantity),
        words(check.statistic),
        words(significant(check.time, 6)),
        words(analytic(check)),
        words(with_error(check.sample, check.std_error)),
    ];
    if approximate {
        cells.push(words(
            check.bias.map_or(String::new(), |b| significant(b, 2)),
        ));
    }
    cells.push(vec![Inline::Marked(mark, z)]);
    cells.push(words(check.source.clone()));
    cells
}

/// The analytic value; what is nothing beside the standard error is rounding, and shown as 0.
fn analytic(check: &Check) -> String {
    let negligible = check.analytic.abs() < 1e-6 * check.std_error;
    significant(if negligible { 0.0 } else { check.analytic }, 6)
}

fn remarks(verification: &Verification) -> Vec<Text> {
    let mut items: Vec<Text> = Vec::new();
    if !verification.settings.defaults.is_empty() {
        items.push(words(verification.settings.describe_defaults()));
    }
    if verification.checks.iter().any(|c| c.bias.is_some()) {
        items.push(words(
            "bias: discretisation error estimated from the same paths at half the step; it is allowed for \
             beside the sampling error",
        ));
    }
    items.extend(
        verification
            .skipped
            .iter()
            .map(|reason| words(format!("not tested: {reason}"))),
    );
    items.extend(summary::fact_lines(&verification.facts));
    let failures = verification.run.collected.failures;
    for (count, what) in [
        (failures.non_finite, "came to a value that is not finite"),
        (failures.left_domain, "left the domain"),
    ] {
        if count > 0 {
            items.push(vec![
                Inline::Marked(Mark::Bad, grouped(count)),
                Inline::Words(format!(
                    " of {} paths {what}",
                    grouped(verification.settings.paths)
                )),
            ]);
        }
    }
    items
}

fn conclusion(verification: &Verification, compiled: &Compiled) -> Text {
    let failed = verification
        .checks
        .iter()
        .filter(|c| !c.passed(verification.threshold))
        .count();
    let refuted = compiled
        .claims
        .iter()
        .filter(|c| c.verdict == Verdict::Refuted)
        .count();
    let total = verification.checks.len();
    let terms = format!(
        "threshold {:.2} standard errors, family-wise error {FAMILY_ERROR}",
        verification.threshold
    );
    if total == 0 && refuted == 0 {
        let why =
            ": no moment or law of this model is known to the compiler, and no claim names one";
        return vec![
            Inline::Marked(Mark::Open, "Nothing to check".into()),
            Inline::Words(why.into()),
        ];
    }
    if verification.passed {
        let worst = verification
            .checks
            .iter()
            .map(|c| c.z().abs())
            .fold(0.0, f64::max);
        let held = match total {
            1 => "The one check holds".to_owned(),
            _ => format!("All {total} checks hold"),
        };
        return vec![
            Inline::Marked(Mark::Good, held),
            Inline::Words(format!(": largest |z| {worst:.2}, {terms}.")),
        ];
    }
    let mut reasons = Vec::new();
    if failed > 0 {
        reasons.push(format!("{failed} of {total} checks fail"));
    }
    if refuted > 0 {
        reasons.push(format!(
            "{refuted} of {} claims are refuted",
            compiled.claims.len()
        ));
    }
    vec![
        Inline::Marked(Mark::Bad, "Not verified".into()),
        Inline::Words(format!(": {}; {terms}.", reasons.join(", "))),
    ]
}
