//! `format`: one layout, whatever a file looked like before; nothing written where anything is wrong.

use std::path::PathBuf;

use driftwright::front::layout::format;
use driftwright::source::SourceFile;
use proptest::prelude::*;
use proptest::test_runner::RngSeed;

use crate::harness::{Folder, models, root, run};

/// Every model file that reads without an error, shipped or made for the tests.
fn sound_files() -> Vec<PathBuf> {
    let mut files = Vec::new();
    for folder in ["models", "tests/fixtures/models", "tests/fixtures/twins"] {
        let entries = std::fs::read_dir(root().join(folder)).unwrap();
        files.extend(entries.map(|e| e.unwrap().path()));
    }
    files.retain(|path| path.extension().is_some_and(|e| e == "toml"));
    files.sort();
    assert!(files.len() >= 40);
    files
}

fn formatted(path: &str, text: &str) -> String {
    format(&SourceFile::new(path, text)).unwrap_or_else(|why| panic!("{path}: {why:?}"))
}

#[test]
fn every_model_keeps_its_meaning_and_its_second_layout() {
    for path in sound_files() {
        let name = path.display().to_string();
        let once = formatted(&name, &std::fs::read_to_string(&path).unwrap());
        assert_eq!(formatted(&name, &once), once, "{name}");
    }
}

#[test]
fn shipped_models_are_in_their_canonical_layout() {
    let paths: Vec<String> = models().iter().map(|m| format!("models/{m}")).collect();
    let mut arguments = vec!["format", "--check"];
    arguments.extend(paths.iter().map(String::as_str));
    let ran = run(&arguments);
    assert_eq!((ran.status, ran.out.as_str()), (0, ""), "{}", ran.err);
}

/// The text with its tables in another order, other spaces, blank lines and line ends; comments behind
/// the headers tell the tables apart.
fn disarranged(text: &str, order: &[u8], spaces: &[u8], windows: bool) -> String {
    let tables: Vec<&str> = text.split("\n\n[").collect();
    let mut kinds: Vec<&str> = Vec::new();
    for table in &tables {
        let kind = table
            .trim_start_matches('[')
            .split(['.', ']'])
            .next()
            .unwrap();
        if !kinds.contains(&kind) {
            kinds.push(kind);
        }
    }
    let place = |table: &str| {
        let kind = table
            .trim_start_matches('[')
            .split(['.', ']'])
            .next()
            .unwrap();
        order[kinds.iter().position(|k| *k == kind).unwrap() % order.len()]
    };
    let mut tables: Vec<&str> = tables;
    tables.sort_by_key(|table| place(table));
    let mut out = String::new();
    let (mut inside, mut step) = (false, 0);
    for line in tables.iter().flat_map(|t| {
        let header = if t.starts_with('[') { "" } else { "[" };
        format!("{header}{t}")
            .lines()
            .map(str::to_owned)
            .collect::<Vec<_>>()
    }) {
        let space = usize::from(spaces[step % spaces.len()]);
        step += 1;
        match line.split_once('=') {
            Some((key, value)) if !inside => {
                out += &format!(
                    "{}{}={}{}",
                    " ".repeat(space),
                    key.trim(),
                    " ".repeat(2 * space),
                    value.trim()
                );
            }
            _ => out += &line,
        }
        inside ^= line.matches("\"\"\"").count() % 2 == 1;
        out += if windows { "\r\n" } else { "\n" };
        if !inside && line.starts_with('[') {
            out += &"\n".repeat(space);
        }
    }
    out
}

proptest! {
    #![proptest_config(ProptestConfig {
        cases: 40,
        rng_seed: RngSeed::Fixed(1),
        failure_persistence: None,
        ..ProptestConfig::default()
    })]

    #[test]
    fn one_layout_comes_of_many(
        file in 0_usize..1000,
        order in prop::collection::vec(any::<u8>(), 9),
        spaces in prop::collection::vec(0_u8..4, 1..9),
        windows in any::<bool>(),
    ) {
        let names = models();
        let name = &names[file % names.len()];
        let text = std::fs::read_to_string(root().join("models").join(name)).unwrap();
        let expected = formatted(name, &text);
        let other = disarranged(&expected, &order, &spaces, windows);
        prop_assert_eq!(formatted(name, &other), expected);
    }
}

const UNTIDY: &str =
    "[states.X]\ndrift='-X  + 1' # home\ninitial = \"0\"\n[model]\nname = \"pond\"";
const TIDY: &str =
    "[model]\nname = \"pond\"\n\n[states.X]\ninitial = \"0\"\ndrift   = \"-X + 1\"  # home\n";

#[test]
fn files_are_written_in_place_and_checked_without_a_write() {
    let folder = Folder::new();
    let path = folder.write("pond.toml", UNTIDY);
    let ran = run(&["format", "--check", &path]);
    assert_eq!(ran.status, 1);
    assert_eq!(ran.out, format!("{path}: would change\n"));
    assert_eq!(std::fs::read_to_string(&path).unwrap(), UNTIDY);
    let ran = run(&["format", &path, &path]);
    assert_eq!(
        (ran.status, ran.out.as_str(), ran.err.as_str()),
        (0, "", "")
    );
    assert_eq!(std::fs::read_to_string(&path).unwrap(), TIDY);
    assert_eq!(run(&["format", "--check", &path]).status, 0);
    assert_eq!(folder.files(), ["pond.toml"]);
}

#[test]
fn a_byte_order_mark_and_windows_line_ends_go() {
    let folder = Folder::new();
    let path = folder.write(
        "pond.toml",
        &format!("\u{feff}{}", TIDY.replace('\n', "\r\n")),
    );
    assert_eq!(run(&["format", "--check", &path]).status, 1);
    assert_eq!(run(&["format", &path]).status, 0);
    assert_eq!(std::fs::read_to_string(&path).unwrap(), TIDY);
    let marked = folder.write("marked.toml", &format!("\u{feff}{TIDY}"));
    assert_eq!(run(&["format", "--check", &marked]).status, 1);
}

#[test]
fn where_one_file_is_wrong_none_is_written() {
    let folder = Folder::new();
    let path = folder.write("pond.toml", UNTIDY);
    let wrong = folder.write("wrong.toml", &UNTIDY.replace("-X", "-Y"));
    let ran = run(&["format", &path, &wrong, &folder.path("none.toml")]);
    assert_eq!(ran.status, 2);
    assert!(
        ran.err.contains("DW0103") && ran.err.contains("DW0001"),
        "{}",
        ran.err
    );
    assert_eq!(std::fs::read_to_string(&path).unwrap(), UNTIDY);
    assert_eq!(folder.files(), ["pond.toml", "wrong.toml"]);
}
