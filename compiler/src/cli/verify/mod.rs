//! `driftwright verify`: the model simulated, and the sample held against analytic values.

mod expect;
mod judge;
mod measure;
mod show;
mod targets;

use std::io;
use std::path::Path;

use driftwright_runtime::{Fact, Simulator as _};
use serde_json::Value;

use self::judge::Check;
use self::targets::Targets;
use super::args::{Format, VerifyArgs};
use super::load::{Loaded, load_and_show};
use super::run::Settings;
use super::{Failure, Outcome, Status, output};
use crate::analysis::claims::Verdict;
use crate::back::interpret::Interpreter;
use crate::pipeline::Compiled;
use crate::report::html;
use crate::report::text::{self, Style};

/// What verifying one model gave.
struct Verification {
    settings: Settings,
    checks: Vec<Check>,
    /// Statistics that could not be put to the test, and why.
    skipped: Vec<String>,
    threshold: f64,
    passed: bool,
    run: measure::Measured,
    /// Facts that hang on parameter values, and whether they hold at those of the run.
    facts: Vec<Fact>,
}

/// Verifies the files, one after the other.
pub(super) fn run(args: &VerifyArgs) -> Outcome {
    if args.report.is_some() && args.files.len() > 1 {
        return Err(Failure(
            "--report takes the evidence of one model: name one file".to_owned(),
        ));
    }
    let mut status = Status::Well;
    let mut documents: Vec<Value> = Vec::new();
    for path in &args.files {
        let (one, document) = verify_file(args, path)?;
        status = status.max(one);
        documents.extend(document);
    }
    if args.run.format == Format::Json {
        // One file gives its object; several, an array of them.
        let text = match documents.as_slice() {
            [] => return Ok(status),
            [one] if args.files.len() == 1 => format!("{one:#}\n"),
            _ => format!("{:#}\n", Value::from(documents)),
        };
        output::print(&text)?;
    }
    Ok(status)
}

fn verify_file(args: &VerifyArgs, path: &Path) -> Result<(Status, Option<Value>), Failure> {
    let Some(loaded) = load_and_show(path) else {
        return Ok((Status::Wrong, None));
    };
    let Some(compiled) = loaded.compiled() else {
        return Ok((Status::Wrong, None));
    };
    let verification = verify(args, &loaded, compiled)?;
    if let Some(path) = &args.report {
        let page = html::write(&show::evidence(&verification, compiled));
        output::deliver(Some(path), &page)?;
    }
    let document = match args.run.format {
        Format::Json => Some(show::json(&verification, compiled)),
        Format::Human => {
            let style = Style {
                colour: output::colour_on(&io::stdout()),
                ..Style::default()
            };
            let document = show::document(&verification, compiled);
            output::print(&format!("{}\n", text::write(&document, style)))?;
            None
        }
    };
    let held = if verification.passed {
        Status::Well
    } else {
        Status::NotHeld
    };
    Ok((held.max(loaded.status()), document))
}

fn verify(
    args: &VerifyArgs,
    loaded: &Loaded,
    compiled: &Compiled,
) -> Result<Verification, Failure> {
    let model = &compiled.model;
    let settings = Settings::new(&args.run, model, &compiled.plan)?;
    let parameters = model
        .parameters
        .iter()
        .filter_map(|p| settings.parameters.get(&p.name).map(|v| (p.symbol, *v)))
        .collect();
    let analyst = expect::Analyst {
        model,
        moments: &compiled.moments,
        parameters,
    };
    let targets = Targets::new(&analyst, &compiled.claims);
    let run = measure::measure(compiled, &targets, &settings)?;
    let (checks, mut skipped) = measure::checks(&analyst, compiled, &targets, &settings, &run);
    skipped.extend(untested_claims(compiled, &checks));
    let threshold = judge::threshold(checks.len());
    let passed = checks.iter().all(|c| c.passed(threshold)) && loaded.status() == Status::Well;
    let facts = Interpreter::new(&compiled.program, &settings.parameters)?.facts();
    Ok(Verification {
        settings,
        checks,
        skipped,
        threshold,
        passed,
        run,
        facts,
    })
}

/// Open claims that no check speaks of.
fn untested_claims(compiled: &Compiled, checks: &[Check]) -> Vec<String> {
    let tested = |name: &str| checks.iter().any(|c| c.claim.as_deref() == Some(name));
    compiled
        .claims
        .iter()
        .filter(|c| c.verdict == Verdict::Open && !tested(&c.name))
        .map(|c| {
            format!(
                "the open claim {}: a sample has nothing to hold against it",
                c.name
            )
        })
        .collect()
}
