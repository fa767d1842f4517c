//! The check values in `tests/reference/A.toml`.

use serde::Deserialize;

#[derive(Deserialize)]
pub(crate) struct File {
    #[serde(rename = "case")]
    pub(crate) cases: Vec<Case>,
}

#[derive(Deserialize)]
pub(crate) struct Case {
    pub(crate) id: String,
    #[serde(default)]
    pub(crate) kind: String,
    #[serde(default)]
    pub(crate) variant: String,
    #[serde(default)]
    pub(crate) key_hex: Vec<String>,
    #[serde(default)]
    pub(crate) counter_hex: Vec<String>,
    #[serde(default)]
    pub(crate) output_hex: Vec<String>,
    #[serde(default)]
    pub(crate) raw_hex: Vec<String>,
    #[serde(default)]
    pub(crate) uniform53_centred: Vec<f64>,
    #[serde(default)]
    pub(crate) normal_from_centred: Vec<f64>,
    #[serde(default)]
    pub(crate) vectors: Vec<Vector>,
    #[serde(default, rename = "check")]
    pub(crate) checks: Vec<Check>,
}

#[derive(Deserialize)]
pub(crate) struct Vector {
    pub(crate) counter: Vec<String>,
    pub(crate) key: Vec<String>,
    pub(crate) out: Vec<String>,
}

#[derive(Deserialize)]
pub(crate) struct Check {
    pub(crate) quantity: String,
    #[serde(default)]
    pub(crate) at: Option<toml::Value>,
    pub(crate) value: f64,
    pub(crate) rel_tol: f64,
}

/// Reads the file.
pub(crate) fn cases() -> Vec<Case> {
    let text = include_str!("reference/A.toml");
    let file: File = toml::from_str(text).expect("the reference file is TOML");
    file.cases
}

/// Words in hexadecimal.
pub(crate) fn words(texts: &[String]) -> Vec<u64> {
    let word = |text: &String| u64::from_str_radix(text, 16).expect("a word in hexadecimal");
    texts.iter().map(word).collect()
}
