//! SARIF documents against the schema of the standard.
//!
//! The schema is the one of the SARIF 2.1.0 standard (OASIS 2020) as the crate `serde-sarif` ships it.

use std::path::Path;
use std::process::Command;

use driftwright::diagnostic::{Diagnostic, sarif};
use driftwright::source::SourceFile;
use jsonschema::Validator;
use serde_json::{Value, json};

use super::{check, root, toml_files};

/// The schema, where cargo has unpacked the crate. Only this platform's packages are asked for:
/// those of others may never have been fetched.
fn validator() -> Validator {
    let output = Command::new(env!("CARGO"))
        .args(["metadata", "--format-version", "1", "--offline", "--locked"])
        .args(["--filter-platform", &platform()])
        .current_dir(root())
        .output()
        .expect("cargo runs");
    let metadata: Value = serde_json::from_slice(&output.stdout).expect("cargo's metadata is JSON");
    let packages = metadata["packages"].as_array().expect("packages");
    let package = packages
        .iter()
        .find(|package| package["name"] == "serde-sarif");
    let manifest = package.expect("a dependency of the tests")["manifest_path"].as_str();
    let folder = Path::new(manifest.unwrap()).parent().unwrap();
    let text = std::fs::read_to_string(folder.join("src/schema.json")).expect("the schema");
    // The pattern of `language` has a bracket without its partner, which the dialect of regular
    // expressions does not allow unescaped.
    let text = text.replace("{2}]?$", "{2}\\\\]?$");
    let schema: Value = serde_json::from_str(&text).expect("the schema is JSON");
    assert!(schema["title"].as_str().unwrap().contains("2.1.0"));
    jsonschema::options()
        .should_validate_formats(true)
        .build(&schema)
        .expect("the schema is a schema")
}

/// The target triple of the compiler in use.
fn platform() -> String {
    let output = Command::new("rustc").arg("-vV").output();
    let text = String::from_utf8(output.expect("rustc runs").stdout).expect("text");
    let line = text.lines().find_map(|line| line.strip_prefix("host: "));
    line.expect("rustc names its host").to_owned()
}

fn faults(validator: &Validator, document: &Value) -> Vec<String> {
    let errors = validator.iter_errors(document);
    errors
        .map(|error| format!("{} at {}", error, error.instance_path()))
        .collect()
}

fn fixtures() -> Vec<(SourceFile, Vec<Diagnostic>)> {
    let files = toml_files(&root().join("tests/fixtures/diagnostics"));
    files.iter().map(|path| check(path)).collect()
}

#[test]
fn every_fixture_alone_and_all_together_follow_the_schema() {
    let validator = validator();
    let fixtures = fixtures();
    let refer = |fixtures: &[(SourceFile, Vec<Diagnostic>)]| {
        sarif(fixtures.iter().map(|(source, found)| (source, &found[..])))
    };
    let documents = fixtures.chunks(1).chain([&fixtures[..]]).map(refer);
    for document in documents {
        let place = &document["runs"][0]["artifacts"][0]["location"]["uri"];
        assert_eq!(
            faults(&validator, &document),
            Vec::<String>::new(),
            "{place}"
        );
    }
}

#[test]
fn clean_files_and_unusual_paths_follow_the_schema() {
    let validator = validator();
    for path in [
        "a b.toml",
        "./über/ß.toml",
        "c:\\x.toml",
        "100%.toml",
        "a#b?c.toml",
        "-",
    ] {
        let source = SourceFile::new(path, "[model]\n");
        let found = driftwright::pipeline::compile(&source).diagnostics;
        for diagnostics in [&found[..], &[]] {
            let document = sarif([(&source, diagnostics)]);
            assert_eq!(
                faults(&validator, &document),
                Vec::<String>::new(),
                "{path}"
            );
        }
    }
    assert_eq!(faults(&validator, &sarif([])), Vec::<String>::new());
}

/// The validator is awake: each of these breaks a valid document.
#[test]
fn broken_documents_are_refused() {
    let validator = validator();
    let (source, found) = &fixtures()[5];
    let document = sarif([(source, &found[..])]);
    assert!(validator.is_valid(&document));
    let breaks: [fn(&mut Value); 6] = [
        |d| d["version"] = json!("2.0.0"),
        |d| d["runs"][0]["results"][0]["level"] = json!("fatal"),
        |d| d["runs"][0]["results"][0]["message"] = json!("text"),
        |d| d["runs"][0]["columnKind"] = json!("bytes"),
        |d| d["runs"][0]["results"][0]["spam"] = json!(1),
        |d| {
            let place = &mut d["runs"][0]["results"][0]["locations"][0]["physicalLocation"];
            place["region"]["startLine"] = json!(0);
        },
    ];
    for (i, break_it) in breaks.iter().enumerate() {
        let mut broken = document.clone();
        break_it(&mut broken);
        assert!(!validator.is_valid(&broken), "break {i}");
    }
}
