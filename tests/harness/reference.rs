//! The check values under `tests/reference/`, with their sources.

use serde::Deserialize;

use super::values::{Values, number, read};

/// A file of cases.
#[derive(Debug, Deserialize)]
pub struct Reference {
    /// The cases.
    pub case: Vec<Case>,
}

/// A process or contract with values to check.
#[derive(Debug, Deserialize)]
pub struct Case {
    /// Its identifier.
    pub id: String,
    /// Its family (laws) or kind (prices, schemes).
    #[serde(alias = "kind")]
    pub family: String,
    /// Where the values come from.
    pub source: Option<Source>,
    /// Parameter values as they stand.
    #[serde(default)]
    pub params: toml::Table,
    /// The values.
    #[serde(default)]
    pub check: Vec<CheckValue>,
    /// Everything else in the table.
    #[serde(flatten)]
    pub rest: toml::Table,
}

/// A published source.
#[derive(Debug, Deserialize)]
pub struct Source {
    /// Author.
    pub author: String,
    /// Title.
    pub title: String,
    /// Year.
    pub year: i64,
    /// Section, table or formula.
    pub place: String,
}

/// One value.
#[derive(Debug, Deserialize)]
pub struct CheckValue {
    /// What it is.
    pub quantity: String,
    /// Where it is taken, for functions: a number, or several for a function of several.
    pub at: Option<toml::Value>,
    /// The value.
    pub value: f64,
}

impl CheckValue {
    /// Where it is taken.
    ///
    /// # Panics
    /// If that is no single number.
    #[must_use]
    pub fn level(&self) -> f64 {
        number(self.at.as_ref().expect("a place where it is taken"))
    }
}

impl Reference {
    /// Reads `tests/reference/<letter>.toml`.
    ///
    /// # Panics
    /// If the file cannot be read or has another form.
    #[must_use]
    pub fn load(letter: &str) -> Self {
        let text = read(&format!("tests/reference/{letter}.toml"));
        toml::from_str(&text).unwrap_or_else(|e| panic!("{letter}.toml: {e}"))
    }

    /// The cases of a family.
    pub fn family<'a>(&'a self, family: &'a str) -> impl Iterator<Item = &'a Case> {
        self.case.iter().filter(move |c| c.family == family)
    }

    /// The case with an identifier.
    ///
    /// # Panics
    /// If there is none.
    #[must_use]
    pub fn by_id(&self, id: &str) -> &Case {
        self.case
            .iter()
            .find(|c| c.id == id)
            .unwrap_or_else(|| panic!("no case {id}"))
    }
}

impl Case {
    /// The parameters that are plain numbers.
    #[must_use]
    pub fn values(&self) -> Values {
        let numbers = self
            .params
            .iter()
            .filter(|(_, v)| v.is_float() || v.is_integer());
        Values(numbers.map(|(k, v)| (k.clone(), number(v))).collect())
    }

    /// A parameter.
    ///
    /// # Panics
    /// If there is none of that name or it is no number.
    #[must_use]
    pub fn parameter(&self, name: &str) -> f64 {
        number(
            self.params
                .get(name)
                .unwrap_or_else(|| panic!("{}: no {name}", self.id)),
        )
    }

    /// The value of a quantity that is taken nowhere in particular.
    ///
    /// # Panics
    /// If there is none.
    #[must_use]
    pub fn value(&self, quantity: &str) -> f64 {
        self.check
            .iter()
            .find(|c| c.quantity == quantity)
            .unwrap_or_else(|| panic!("{}: no {quantity}", self.id))
            .value
    }

    /// The values of a quantity with where they are taken.
    pub fn values_at<'a>(&'a self, quantity: &'a str) -> impl Iterator<Item = (f64, f64)> + 'a {
        self.check
            .iter()
            .filter(move |c| c.quantity == quantity)
            .map(|c| (c.level(), c.value))
    }

    /// An entry of the case outside `params`.
    ///
    /// # Panics
    /// If there is none of that name.
    #[must_use]
    pub fn entry(&self, name: &str) -> &toml::Value {
        self.rest
            .get(name)
            .unwrap_or_else(|| panic!("{}: no {name}", self.id))
    }
}
