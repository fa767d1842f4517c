//! Golden files: step programs and generated Rust, read by people when they change.
//!
//! `UPDATE_GOLDEN=1 cargo test --test golden` writes them anew; the difference is then reviewed.

use std::path::{Path, PathBuf};

use driftwright::back::rust::generate_source;
use driftwright::program::Program;

fn program(model: &str) -> Program {
    let path = format!("../{model}");
    driftwright::build::model(Path::new(&path), model)
        .expect("the model compiles")
        .program
}

/// Compares a text with a golden file.
fn golden(file: &str, text: &str) {
    let path = PathBuf::from("golden").join(file);
    if std::env::var_os("UPDATE_GOLDEN").is_some() {
        std::fs::write(&path, text).expect("the golden file is writable");
    }
    let expected = std::fs::read_to_string(&path).expect("the golden file is there");
    let first = expected
        .lines()
        .zip(text.lines())
        .enumerate()
        .find(|(_, (old, new))| old != new);
    if let Some((line, (old, new))) = first {
        panic!(
            "{} differs first in line {}:\n  was: {old}\n  now: {new}",
            path.display(),
            line + 1
        );
    }
    assert!(expected == text, "{} differs in length", path.display());
}

/// Models whose generated Rust is kept: one exact law, one coupled, one whose
/// coefficients move with time, one approximate scheme.
const RUST: [&str; 4] = [
    "models/orchard_spot.toml",
    "models/harbour_account.toml",
    "models/honey_market.toml",
    "models/peat_season.toml",
];

/// Models whose step program is kept: what must not change unnoticed, since it decides every bit.
const PROGRAMS: [&str; 6] = [
    "models/orchard_spot.toml",
    "models/twin_orchards.toml",
    "models/honey_market.toml",
    "models/fog_buoy.toml",
    "models/peat_season.toml",
    "tests/fixtures/models/seasons.toml",
];

fn stem(model: &str) -> &str {
    Path::new(model)
        .file_stem()
        .and_then(|stem| stem.to_str())
        .expect("model files have names")
}

#[test]
fn generated_rust() {
    for model in RUST {
        golden(
            &format!("rust/{}.rs", stem(model)),
            &generate_source(&program(model)),
        );
    }
}

#[test]
fn step_programs() {
    for model in PROGRAMS {
        golden(
            &format!("program/{}.txt", stem(model)),
            &program(model).to_string(),
        );
    }
}

#[test]
fn generation_is_deterministic() {
    for model in RUST {
        assert_eq!(
            generate_source(&program(model)),
            generate_source(&program(model))
        );
    }
}
