//! The JSON Schema of model files against a validator: it is a schema, takes what the compiler takes,
//! and refuses what is wrong in the shape of a file.

use driftwright::front::json_schema;
use jsonschema::Validator;
use serde_json::Value;

use super::{root, toml_files};

fn validator() -> Validator {
    jsonschema::validator_for(&json_schema()).expect("a schema")
}

/// A TOML document as JSON; dates and times as texts, numbers that JSON has not as null.
fn as_json(value: toml::Value) -> Value {
    match value {
        toml::Value::String(text) => Value::String(text),
        toml::Value::Integer(number) => number.into(),
        toml::Value::Float(number) => number.into(),
        toml::Value::Boolean(truth) => truth.into(),
        toml::Value::Datetime(time) => Value::String(time.to_string()),
        toml::Value::Array(items) => items.into_iter().map(as_json).collect(),
        toml::Value::Table(table) => table.into_iter().map(|(k, v)| (k, as_json(v))).collect(),
    }
}

fn document(text: &str) -> Value {
    as_json(toml::Value::Table(text.parse().expect("TOML")))
}

#[test]
fn the_schema_is_a_schema() {
    jsonschema::meta::validate(&json_schema()).expect("valid in the dialect it names");
}

#[test]
fn what_the_compiler_takes_is_accepted() {
    let validator = validator();
    for folder in ["models", "tests/fixtures/models", "tests/fixtures/twins"] {
        for path in toml_files(&root().join(folder)) {
            let document = document(&std::fs::read_to_string(&path).unwrap());
            let faults: Vec<String> = validator
                .iter_errors(&document)
                .map(|error| format!("{error} at {}", error.instance_path()))
                .collect();
            assert!(faults.is_empty(), "{}: {faults:?}", path.display());
        }
    }
}

/// The fixtures whose fault lies in keys, types, names and words.
#[test]
fn fixtures_at_fault_in_their_shape_are_refused() {
    let validator = validator();
    let of_shape = [
        "dw0101", "dw0102", "dw0104", "dw0105", "dw0108", "dw0302", "dw0501",
    ];
    let mut refused = 0;
    for path in toml_files(&root().join("tests/fixtures/diagnostics")) {
        let name = path.file_name().unwrap().to_string_lossy().into_owned();
        if of_shape.iter().any(|code| name.starts_with(code)) {
            let document = document(&std::fs::read_to_string(&path).unwrap());
            assert!(!validator.is_valid(&document), "{name}");
            refused += 1;
        }
    }
    assert!(refused >= of_shape.len());
}

/// Faults one at a time, so that none hides behind another.
#[test]
fn single_faults_are_refused_and_their_absence_is_not() {
    let validator = validator();
    let model = |change: (&str, &str)| {
        let text = "[model]\nname = \"m\"\ndrivers = [\"W\"]\n[parameters]\nk = 1\n\
             s = { value = 2, range = \"(0, inf)\" }\n[states.X]\ninitial = \"1\"\n\
             drift = \"-k*X\"\ndiffusion = \"s\"\ndomain = \"[0, inf)\"\nat_edge = \"absorb\"\n\
             [claims]\nc = { drift_of = \"X\", is = \"-k*X\" }\n";
        assert!(text.contains(change.0), "{}", change.0);
        document(&text.replacen(change.0, change.1, 1))
    };
    assert!(validator.is_valid(&model(("k = 1", "k = 1"))));
    for change in [
        ("drift = ", "drfit = "),
        ("[states.X]", "[state.X]"),
        ("k = 1", "k = \"1\""),
        ("k = 1", "\"k 1\" = 1"),
        ("value = 2", "value = \"2\""),
        ("range = ", "rnage = "),
        ("\"(0, inf)\"", "\"0 to inf\""),
        ("name = \"m\"", "name = \"My model\""),
        ("name = \"m\"\n", ""),
        ("[\"W\"]", "\"W\""),
        ("[\"W\"]", "[\"W\", \"W\"]"),
        ("initial = \"1\"", "initial = 1"),
        ("drift = \"-k*X\"\n", ""),
        ("diffusion = \"s\"", "diffusion = [\"s\"]"),
        ("\"absorb\"", "\"vanish\""),
        ("\"absorb\"", "{}"),
        ("\"absorb\"", "{ low = \"absorb\" }"),
        ("\nat_edge", "\nscheme = \"euler\"\nat_edge"),
        (
            "drift_of = \"X\", is",
            "martingale = \"X\", drift_of = \"X\", is",
        ),
        ("is = \"-k*X\"", "about = \"-k*X\""),
        ("drift_of = \"X\", ", ""),
    ] {
        assert!(!validator.is_valid(&model(change)), "{change:?}");
    }
}
