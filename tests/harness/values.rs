//! Values of a model's parameters, read from its file by the TOML library alone.

use std::collections::BTreeMap;
use std::path::PathBuf;

/// Values by parameter name.
#[derive(Clone, Debug, Default)]
pub struct Values(pub BTreeMap<String, f64>);

impl Values {
    /// The values a model file gives its parameters.
    ///
    /// # Panics
    /// If the text is not TOML or a value is not a number.
    #[must_use]
    pub fn from_model_text(text: &str) -> Self {
        let table: toml::Table = text.parse().expect("a model file is TOML");
        let mut values = BTreeMap::new();
        let parameters = table.get("parameters").and_then(toml::Value::as_table);
        for (name, entry) in parameters.into_iter().flatten() {
            let value = match entry {
                toml::Value::Table(entry) => entry.get("value"),
                number => Some(number),
            };
            if let Some(value) = value {
                values.insert(name.clone(), number(value));
            }
        }
        Self(values)
    }

    /// The value of a parameter.
    ///
    /// # Panics
    /// If there is none of that name.
    #[must_use]
    pub fn get(&self, name: &str) -> f64 {
        *self
            .0
            .get(name)
            .unwrap_or_else(|| panic!("no value for {name}"))
    }
}

/// A TOML number as a double.
///
/// # Panics
/// If the value is no number.
#[must_use]
pub fn number(value: &toml::Value) -> f64 {
    match value {
        toml::Value::Float(x) => *x,
        toml::Value::Integer(i) => *i as f64,
        other => panic!("{other:?} is no number"),
    }
}

/// The top level of the repository.
#[must_use]
pub fn repository() -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("..")
}

/// The text of a file named from the top level of the repository.
///
/// # Panics
/// If it cannot be read.
#[must_use]
pub fn read(path: &str) -> String {
    let path = repository().join(path);
    std::fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.display()))
}

/// The names of the model files in a folder named from the top level of the repository, sorted.
///
/// # Panics
/// If the folder cannot be read.
#[must_use]
pub fn model_names(folder: &str) -> Vec<String> {
    let entries = std::fs::read_dir(repository().join(folder)).expect("a folder");
    let paths = entries.map(|entry| entry.expect("an entry").path());
    let mut names: Vec<String> = paths
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .filter_map(|path| Some(path.file_stem()?.to_str()?.to_string()))
        .collect();
    names.sort();
    names
}
