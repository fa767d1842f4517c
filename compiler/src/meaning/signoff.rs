//! Sign-offs: the record that a person has reviewed what a model means.
//!
//! The record stands in a readable TOML file beside the model and holds the meaning that was reviewed,
//! not only its hash: what changed since can be shown, by proof, and a later tool can still read it.
//! Layout, titles, default values and spelling of formulas do not void it; any change of meaning does.

use std::collections::BTreeMap;
use std::fmt::Write as _;
use std::path::{Path, PathBuf};

use serde::Deserialize;
use sha2::{Digest, Sha256};

use super::{Comparison, Entry, FORM, Meaning, Value, compare};
use crate::model::Model;

/// The keys of the lists of names.
const NAMES: [&str; 3] = ["parameters", "drivers", "states"];

/// A sign-off.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Record {
    /// Who reviewed.
    pub by: String,
    /// The day, as `2026-03-31`.
    pub on: String,
    /// What the reviewer wants known.
    pub note: Option<String>,
    /// What was reviewed.
    pub meaning: Meaning,
}

/// Where a model stands with its sign-off.
#[derive(Clone, Debug, PartialEq)]
pub enum Standing {
    /// It means what was reviewed.
    Valid(Record),
    /// There is no sign-off.
    Unsigned,
    /// It means something else since.
    Voided(Record, Comparison),
    /// The file is no sign-off, was changed by hand, or is of a form that this version does not know.
    Unreadable(String),
}

/// How the names of sign-offs end.
pub const ENDING: &str = ".signoff.toml";

/// The file beside a model that holds its sign-off: `orchard.signoff.toml` for `orchard.toml`.
pub fn path_beside(model: &Path) -> PathBuf {
    model.with_extension(&ENDING[1..])
}

/// Judges a model against the text of its sign-off, if it has one.
pub fn standing(model: &Model, record: Option<&str>) -> Standing {
    let Some(text) = record else {
        return Standing::Unsigned;
    };
    match read(text) {
        Err(reason) => Standing::Unreadable(reason),
        Ok(record) => {
            let comparison = compare(&record.meaning, model);
            if comparison.is_same() {
                Standing::Valid(record)
            } else {
                Standing::Voided(record, comparison)
            }
        }
    }
}

/// The text of the file.
pub fn write(record: &Record) -> String {
    let mut out = String::from(
        "# The review of a model, written by `driftwright signoff`. The derivation below is what was reviewed;\n\
         # its hash shows whether this file was changed by hand. It replaces neither independent validation\n\
         # nor the firm's model-risk policy.\n\n[signoff]\n",
    );
    let field = |out: &mut String, key: &str, text: &str| {
        writeln!(out, "{key} = {}", quoted(text)).expect("text takes text");
    };
    field(&mut out, "by", &record.by);
    field(&mut out, "on", &record.on);
    if let Some(note) = &record.note {
        field(&mut out, "note", note);
    }
    field(&mut out, "tool", env!("CARGO_PKG_VERSION"));
    writeln!(out, "form = {FORM}").expect("text takes text");
    let derivation = derivation(&record.meaning);
    field(&mut out, "sha256", &hash(&derivation));
    out.push('\n');
    out + &derivation
}

/// The derivation in its canonical form, entries in the order of their keys: what the hash is taken of.
fn derivation(meaning: &Meaning) -> String {
    let list = |items: &mut dyn Iterator<Item = String>| items.collect::<Vec<_>>().join(", ");
    let mut out = String::from("[derivation]\n");
    for (kind, names) in NAMES.iter().zip(&meaning.names) {
        let names = list(&mut names.iter().map(|name| quoted(name)));
        out.push_str(&format!("{kind} = [{names}]\n"));
    }
    if !meaning.parts.is_empty() {
        out.push_str("where = [\n");
        for (name, text) in &meaning.parts {
            out.push_str(&format!("  [{}, {}],\n", quoted(name), quoted(text)));
        }
        out.push_str("]\n");
    }
    out.push_str("\n[derivation.entries]\n");
    let mut lines: Vec<String> = meaning
        .entries
        .iter()
        .map(|entry| {
            let key = quoted(&entry.key.join("."));
            match &entry.value {
                Value::Formula(text) => format!("{key} = {}\n", quoted(text)),
                Value::Interval(text) => format!("{key} = {{ interval = {} }}\n", quoted(text)),
                Value::Word(word) => format!("{key} = {{ word = {} }}\n", quoted(word)),
            }
        })
        .collect();
    lines.sort();
    out + &lines.concat()
}

/// A TOML string.
fn quoted(text: &str) -> String {
    toml::Value::String(text.to_owned()).to_string()
}

fn hash(text: &str) -> String {
    let digest = Sha256::digest(text.as_bytes());
    digest.iter().map(|byte| format!("{byte:02x}")).collect()
}

/// The file as TOML has it.
#[derive(Deserialize)]
struct File {
    signoff: Head,
    derivation: Derivation,
}

#[derive(Deserialize)]
struct Head {
    by: String,
    on: String,
    note: Option<String>,
    form: u32,
    sha256: String,
}

#[derive(Deserialize)]
struct Derivation {
    parameters: Vec<String>,
    drivers: Vec<String>,
    states: Vec<String>,
    #[serde(default)]
    r#where: Vec<(String, String)>,
    entries: BTreeMap<String, Written>,
}

#[derive(Deserialize)]
#[serde(untagged)]
enum Written {
    Formula(String),
    Interval { interval: String },
    Word { word: String },
}

fn read(text: &str) -> Result<Record, String> {
    let File {
        signoff,
        derivation: read,
    } = toml::from_str(text).map_err(|e| e.message().to_owned())?;
    if signoff.form != FORM {
        return Err(format!(
            "it is written in form {}, and this version reads form {FORM}",
            signoff.form
        ));
    }
    let entry = |(key, written): (String, Written)| Entry {
        key: key.split('.').map(str::to_owned).collect(),
        value: match written {
            Written::Formula(text) => Value::Formula(text),
            Written::Interval { interval } => Value::Interval(interval),
            Written::Word { word } => Value::Word(word),
        },
    };
    let meaning = Meaning {
        entries: read.entries.into_iter().map(entry).collect(),
        parts: read.r#where,
        names: [read.parameters, read.drivers, read.states],
    };
    if hash(&derivation(&meaning)) != signoff.sha256 {
        return Err(
            "its derivation was changed after it was signed: the hash does not match".to_owned(),
        );
    }
    Ok(Record {
        by: signoff.by,
        on: signoff.on,
        note: signoff.note,
        meaning,
    })
}
