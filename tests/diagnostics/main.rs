//! Every diagnostic code has a fixture, and every fixture its expected text.
//!
//! `tests/fixtures/diagnostics/<code>-<slug>.toml` is checked and rendered; the result must equal the
//! `.txt` beside it. `UPDATE_FIXTURES=1` rewrites the expected texts, for a person to read before they
//! are committed.

mod sarif;
mod schema;
mod warnings;

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};

use driftwright::diagnostic::{Code, Diagnostic, Diagnostics, human, json};
use driftwright::front;
use driftwright::pipeline::compile;
use driftwright::source::SourceFile;

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("..")
}

fn toml_files(folder: &Path) -> Vec<PathBuf> {
    let entries = std::fs::read_dir(folder).expect("the folder is part of the repository");
    let mut files: Vec<PathBuf> = entries.map(|entry| entry.unwrap().path()).collect();
    files.retain(|path| {
        path.extension()
            .is_some_and(|extension| extension == "toml")
    });
    files.sort();
    files
}

/// The file under its bare name, so that expected texts hold no path of a machine.
fn check(path: &Path) -> (SourceFile, Vec<Diagnostic>) {
    let name = path.file_name().unwrap().to_string_lossy().into_owned();
    let source = match front::load(path) {
        Ok(loaded) => SourceFile::new(name, loaded.text()),
        Err(diagnostic) => return (SourceFile::new(name, ""), vec![diagnostic]),
    };
    let diagnostics = compile(&source).diagnostics;
    (source, diagnostics)
}

#[test]
fn fixtures_render_as_expected() {
    let update = std::env::var_os("UPDATE_FIXTURES").is_some();
    let mut wrong = Vec::new();
    for path in toml_files(&root().join("tests/fixtures/diagnostics")) {
        let (source, diagnostics) = check(&path);
        let text =
            human(&source, &diagnostics, false).replace(&path.display().to_string(), source.path());
        let expected = path.with_extension("txt");
        if update {
            std::fs::write(&expected, &text).unwrap();
        }
        if std::fs::read_to_string(&expected).unwrap_or_default() != text {
            wrong.push(format!("{}:\n{text}", path.display()));
        }
        let code = path.file_stem().unwrap().to_string_lossy()[..6].to_uppercase();
        let shown = diagnostics
            .iter()
            .any(|diagnostic| diagnostic.code.id() == code);
        assert!(shown, "{} does not show {code}:\n{text}", path.display());
    }
    assert!(
        wrong.is_empty(),
        "expected texts differ:\n{}",
        wrong.join("\n")
    );
}

/// Codes that no model file alone shows, or only one too large to be kept, and the tests that make them.
const GENERATED: [(&str, &str); 4] = [
    ("DW0602", "compiler/tests/scale.rs"),
    ("DW0801", "tests/commands/signoff.rs"),
    ("DW0802", "tests/commands/signoff.rs"),
    ("DW0803", "tests/commands/signoff.rs"),
];

#[test]
fn every_code_has_a_fixture() {
    let files = toml_files(&root().join("tests/fixtures/diagnostics"));
    let covered: BTreeSet<String> = files
        .iter()
        .map(|path| path.file_stem().unwrap().to_string_lossy()[..6].to_uppercase())
        .collect();
    let missing: Vec<&str> = Code::ALL
        .iter()
        .map(|code| code.id())
        .filter(|id| !covered.contains(*id) && GENERATED.iter().all(|(code, _)| code != id))
        .collect();
    for (code, test) in GENERATED {
        let text = std::fs::read_to_string(root().join(test)).expect("the test is there");
        let variant = Code::from_id(code).expect("a code");
        let named = text.contains(&format!("Code::{variant:?}"));
        assert!(
            named || text.contains(&format!("\"{code}\"")),
            "{test}: {code}"
        );
    }
    assert!(missing.is_empty(), "no fixture for {missing:?}");
}

#[test]
fn codes_are_unique_ordered_and_explained() {
    let ids: Vec<&str> = Code::ALL.iter().map(|code| code.id()).collect();
    let mut sorted = ids.clone();
    sorted.sort_unstable();
    sorted.dedup();
    assert_eq!(ids, sorted);
    for code in Code::ALL {
        assert!(
            code.explanation().len() > 60,
            "{} needs an explanation",
            code.id()
        );
        assert_eq!(Code::from_id(&code.id().to_lowercase()), Some(*code));
    }
}

#[test]
fn every_finding_says_what_to_do() {
    for path in toml_files(&root().join("tests/fixtures/diagnostics")) {
        for diagnostic in check(&path).1 {
            assert!(
                diagnostic.hint.is_some(),
                "{}: {}",
                path.display(),
                diagnostic.message
            );
        }
    }
}

#[test]
fn shipped_models_are_read_without_a_word() {
    for path in toml_files(&root().join("models")) {
        let (source, diagnostics) = check(&path);
        assert!(
            diagnostics.is_empty(),
            "{}",
            human(&source, &diagnostics, false)
        );
    }
}

#[test]
fn json_counts_lines_and_characters_from_one() {
    let text = "[model]\nname = \"a\"\n[parameters]\n\"σ\" = 1\n[states.X]\ninitial = \"1\"\ndrift = \"σ*τ\"\n";
    let source = SourceFile::new("a.toml", text);
    let mut diagnostics = Diagnostics::new();
    assert!(front::read(&source, &mut diagnostics).is_none());
    let found = diagnostics.finish();
    let document = json([(&source, &found[..])]);
    let first = &document["files"][0]["diagnostics"][0];
    assert_eq!(document["files"][0]["path"], "a.toml");
    assert_eq!(first["code"], "DW0103");
    assert_eq!(first["severity"], "error");
    let place =
        ["line", "column", "end_line", "end_column"].map(|key| first[key].as_u64().unwrap());
    assert_eq!(place, [7, 12, 7, 13]);
}
