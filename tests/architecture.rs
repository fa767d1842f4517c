//! Who may import whom inside the compiler: a model flows one way, and nothing flows back.

use std::fs;
use std::path::{Path, PathBuf};

use driftwright_tests::harness::values::repository;

/// Each module with those it may name.
const MAY_USE: [(&str, &[&str]); 14] = [
    ("source", &[]),
    ("diagnostic", &["source"]),
    ("symbolic", &["source"]),
    ("model", &["source", "symbolic"]),
    ("front", &["source", "diagnostic", "symbolic", "model"]),
    ("meaning", &["source", "symbolic", "model", "front"]),
    ("calculus", &["source", "diagnostic", "symbolic", "model"]),
    (
        "analysis",
        &["source", "diagnostic", "symbolic", "model", "calculus"],
    ),
    (
        "scheme",
        &[
            "source",
            "diagnostic",
            "symbolic",
            "model",
            "calculus",
            "analysis",
        ],
    ),
    (
        "program",
        &[
            "source", "symbolic", "model", "calculus", "analysis", "scheme",
        ],
    ),
    ("back", &["program"]),
    (
        "report",
        &[
            "source",
            "diagnostic",
            // A formula is set from its text, read by the parser of the language.
            "front",
            "symbolic",
            "model",
            "calculus",
            "analysis",
            "scheme",
            "pipeline",
            "meaning",
        ],
    ),
    ("pipeline", &["*"]),
    ("build", &["*"]),
];

/// Passes that come after the plan although they live beside earlier ones: they judge what the plan allows.
const AFTER_THE_PLAN: [&str; 3] = ["analysis/claims", "analysis/facts", "analysis/moments"];

/// Files that hold tests alone may look ahead: a back end is the best way to see what a program means.
const TESTS_ALONE: [&str; 3] = ["program/sketch.rs", "program/tests", "symbolic/tests"];

/// All Rust files under a folder.
fn files(folder: &Path, found: &mut Vec<PathBuf>) {
    for entry in fs::read_dir(folder).expect("a folder") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            files(&path, found);
        } else if path.extension().is_some_and(|e| e == "rs") {
            found.push(path);
        }
    }
    found.sort();
}

/// The paths after `crate::` in a line of code, groups taken apart as far as their first names.
fn named(line: &str) -> Vec<String> {
    let code = line.split("//").next().unwrap_or("");
    let after = code.split("crate::").skip(1);
    after
        .flat_map(|rest| match rest.strip_prefix('{') {
            Some(group) => group
                .trim_end_matches(['}', ';'])
                .split(", ")
                .map(first_names)
                .collect(),
            None => vec![first_names(rest)],
        })
        .collect()
}

/// `scheme::Plan` of `scheme::Plan;`, `model` of `model::{A, B}`.
fn first_names(path: &str) -> String {
    let end = path
        .find(|c: char| !(c.is_alphanumeric() || c == '_' || c == ':'))
        .unwrap_or(path.len());
    path[..end].trim_end_matches(':').to_string()
}

/// Why a use breaks the order, if it does.
fn breach(module: &str, file: &str, used: &str) -> Option<String> {
    let target = used.split("::").next().unwrap_or(used);
    let allowed = MAY_USE.iter().find(|(name, _)| *name == module)?.1;
    let late = AFTER_THE_PLAN.iter().any(|pass| file.starts_with(pass));
    let fine = target == module
        || TESTS_ALONE.iter().any(|tests| file.starts_with(tests))
        || allowed.contains(&"*")
        || allowed.contains(&target)
        || (late && ["analysis", "calculus", "scheme"].contains(&target));
    (!fine).then(|| format!("{file} uses crate::{used}"))
}

#[test]
fn modules_import_only_what_comes_before_them() {
    let root = repository().join("compiler/src");
    let mut found = Vec::new();
    files(&root, &mut found);
    let mut breaches = Vec::new();
    let mut seen = 0;
    for path in found {
        let file = path.strip_prefix(&root).expect("below the root");
        let file = file.to_string_lossy().replace('\\', "/");
        let module = file.split(['/', '.']).next().unwrap_or_default();
        for line in fs::read_to_string(&path).expect("a source file").lines() {
            for used in named(line) {
                seen += 1;
                breaches.extend(breach(module, &file, &used));
            }
        }
    }
    assert!(seen > 100, "the test found only {seen} uses");
    assert!(breaches.is_empty(), "{}", breaches.join("\n"));
}

#[test]
fn a_breach_is_seen() {
    assert_eq!(
        named("use crate::back::rust::generate; // crate::cli"),
        ["back::rust::generate"]
    );
    assert_eq!(
        named("use crate::{model::Model, scheme::Plan};"),
        ["model::Model", "scheme::Plan"]
    );
    assert!(breach("symbolic", "symbolic/pool.rs", "model::Model").is_some());
    assert!(breach("report", "report/text.rs", "back::rust").is_some());
    assert!(breach("model", "model.rs", "scheme::Plan").is_some());
}

#[test]
fn generated_code_and_runtime_stand_alone() {
    let manifest = fs::read_to_string(repository().join("runtime/Cargo.toml")).expect("a manifest");
    let table: toml::Table = manifest.parse().expect("TOML");
    let dependencies = table["dependencies"].as_table().expect("a table");
    let names: Vec<&String> = dependencies.keys().collect();
    assert_eq!(
        names,
        ["libm", "rand_core"],
        "the runtime depends on nothing else"
    );
}
