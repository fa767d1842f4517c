//! What fuzzing found, and a small corpus: the properties of the fuzz targets hold for all of it.
//!
//! A formula that went wrong once stands here, a model under `tests/fixtures/fuzzed/` with a comment
//! that says what went wrong.

mod folders;

use std::panic::{AssertUnwindSafe, catch_unwind};

use driftwright_fuzzing::{formula, generate, model};
use folders::{contents, repository};

/// Formulas that went wrong, and how.
const FORMULAS: [(&str, &str); 5] = [
    (
        "0^x",
        "its derivative held log(0), which does not read back",
    ),
    ("(-2)^x", "its derivative held log(-2), likewise"),
    (
        "7^900",
        "it was printed with more digits than a number may have",
    ),
    (
        "1/5e301 - x/7e305",
        "the inverse of a long number read back as another formula",
    ),
    (
        "(33329e-21 ^3*315+ x^x^3)^21",
        "the text for people is cut, and was held to read back",
    ),
];

/// The names and contents of a target's corpus.
fn corpus(target: &str) -> Vec<(String, Vec<u8>)> {
    contents(&repository().join("tests/fuzz/corpus").join(target))
}

/// Runs the check on every file and names all that fail.
fn holds_for_all(target: &str, check: impl Fn(&[u8])) {
    let files = corpus(target);
    assert!(files.len() > 20, "{target}: only {} files", files.len());
    let failed: Vec<&str> = files
        .iter()
        .filter(|(_, bytes)| catch_unwind(AssertUnwindSafe(|| check(bytes))).is_err())
        .map(|(name, _)| name.as_str())
        .collect();
    assert!(failed.is_empty(), "{target}:\n{}", failed.join("\n"));
}

#[test]
fn formulas_that_went_wrong_hold() {
    for (text, what) in FORMULAS {
        let outcome = catch_unwind(|| formula::check(text));
        assert!(outcome.is_ok(), "{text}: once, {what}");
    }
}

#[test]
fn models_that_went_wrong_hold() {
    for (name, bytes) in contents(&repository().join("tests/fixtures/fuzzed")) {
        let text = String::from_utf8(bytes).expect("a model is text");
        assert!(text.starts_with('#'), "{name} says what went wrong");
        let outcome = catch_unwind(|| model::check_text(&text));
        assert!(
            outcome.is_ok(),
            "{name}: {}",
            text.lines().next().unwrap_or_default()
        );
    }
}

#[test]
fn the_corpus_of_formulas_holds() {
    holds_for_all("formula_text", |bytes| {
        formula::check(&String::from_utf8_lossy(bytes));
    });
}

#[test]
fn the_corpus_of_model_files_holds() {
    holds_for_all("model_bytes", model::check_bytes);
}

#[test]
fn the_corpus_of_random_models_holds() {
    holds_for_all("structured_model", |bytes| {
        model::check_text(&generate::model(bytes));
    });
}

#[test]
fn a_third_of_the_random_models_compile() {
    let models = corpus("structured_model");
    let sound = models
        .iter()
        .filter(|(_, bytes)| model::compiles(&generate::model(bytes)))
        .count();
    assert!(
        3 * sound > models.len(),
        "only {sound} of {} compile",
        models.len()
    );
}
