//! Properties of any model file.

use driftwright::calculus;
use driftwright::diagnostic::{Diagnostic, human, json, sarif};
use driftwright::front;
use driftwright::front::formula::parse_in_pool;
use driftwright::front::layout::{self, Refusal};
use driftwright::pipeline::{Compilation, Compiled, compile};
use driftwright::report::text::Style;
use driftwright::report::{self, Derivation};
use driftwright::source::{SourceFile, Span};
use driftwright::{Code, symbolic::Pool};
use serde_json::Value;

use crate::run;

/// [`check_text`] for the bytes of a file; where they are no text, the finding that says so.
///
/// # Panics
/// As [`check_text`].
pub fn check_bytes(bytes: &[u8]) {
    match front::decode("model.toml", bytes) {
        Ok(source) => check_text(source.text()),
        Err(finding) => check_findings(&SourceFile::new("model.toml", ""), &[finding]),
    }
}

/// Runs every pass and every writer on a model file. Findings point into the file and render in every
/// form; the layout keeps the meaning and is its own layout; a model that compiles has reports whose
/// formulas can be read, Rust that parses, and paths that are finite or counted.
///
/// # Panics
/// Where one of these fails.
pub fn check_text(text: &str) {
    let source = SourceFile::new("model.toml", text);
    let compilation = compile(&source);
    check_findings(&source, &compilation.diagnostics);
    check_layout(text);
    let Compilation {
        diagnostics,
        compiled: Some(compiled),
    } = compilation
    else {
        return;
    };
    let wrong: Vec<&Diagnostic> = diagnostics.iter().filter(|d| d.is_error()).collect();
    if wrong.iter().all(|d| d.code == Code::ClaimRefuted) {
        check_reports(&compiled, &diagnostics);
    }
    if wrong.is_empty() {
        run::check(&compiled);
    }
}

/// Whether a model file has no errors.
#[must_use]
pub fn compiles(text: &str) -> bool {
    !compile(&SourceFile::new("model.toml", text)).has_errors()
}

/// Every place is in the file, at whole characters, and every renderer takes every finding.
fn check_findings(source: &SourceFile, found: &[Diagnostic]) {
    for diagnostic in found {
        let labels = diagnostic.labels.iter().map(|label| label.span);
        for Span { start, end } in labels.chain([diagnostic.span]) {
            assert!(
                source.text().get(start..end).is_some(),
                "{start}..{end} is no place in the file: {diagnostic:?}"
            );
        }
        assert!(diagnostic.hint.is_some(), "no way out: {diagnostic:?}");
    }
    for colour in [false, true] {
        human(source, found, colour);
    }
    let _ = json([(source, found)]).to_string();
    let _ = sarif([(source, found)]).to_string();
}

/// The layout of a sound file means the same and stays as it is when laid out again.
///
/// # Panics
/// Where it does not.
pub fn check_layout(text: &str) {
    let laid_out = match layout::format(&SourceFile::new("model.toml", text)) {
        Ok(laid_out) => laid_out,
        Err(Refusal::Errors(_)) => return,
        Err(Refusal::Meaning(what)) => panic!("the layout changes the meaning of {what}"),
    };
    match layout::format(&SourceFile::new("model.toml", laid_out.as_str())) {
        Ok(again) => assert_eq!(laid_out, again, "the layout is not its own"),
        Err(refusal) => panic!("the layout cannot be laid out: {refusal:?}\n{laid_out}"),
    }
}

/// Every report can be written, also for formulas on the spot, and programs can read its formulas.
fn check_reports(compiled: &Compiled, diagnostics: &[Diagnostic]) {
    let derivation = Derivation::new(compiled, diagnostics);
    write(&report::dossier(&derivation));
    let document = report::json::derivation(&derivation);
    let pool = &compiled.model.pool;
    check_formulas(pool, &document);
    let own = compiled.model.derived.iter().map(|d| d.formula.expr);
    for formula in own {
        let expansion = calculus::expand(&compiled.model, &compiled.dynamics.states, formula);
        write(&report::on_the_spot(&derivation, &expansion));
        check_formulas(pool, &report::json::on_the_spot(&derivation, &expansion));
    }
}

fn write(document: &report::Document) {
    for colour in [false, true] {
        let style = Style {
            colour,
            ..Style::default()
        };
        report::text::write(document, style);
    }
    report::markdown::write(document);
    report::html::write(document);
    report::latex::write(document);
}

/// The formulas of the states and derived quantities in a report can be parsed.
fn check_formulas(pool: &Pool, document: &Value) {
    let groups = ["states", "derived"].map(|key| document[key].as_object());
    for entry in groups
        .into_iter()
        .flatten()
        .flat_map(|group| group.values())
    {
        let plain = ["formula", "drift", "chain_rule_drift", "ito_correction"];
        let plain = plain.iter().filter_map(|key| entry[key].as_str());
        let noise = entry["diffusion"].as_object().into_iter().flatten();
        for text in plain.chain(noise.filter_map(|(_, value)| value.as_str())) {
            if let Err(errors) = parse_in_pool(pool, text) {
                panic!("a report holds `{text}`: {errors:?}");
            }
        }
    }
}
