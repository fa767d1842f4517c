//! Model texts built from reference cases.

use std::fmt::Write;

use driftwright_tests::harness::reference::Case;

/// A model file in the making.
#[derive(Clone, Debug, Default)]
pub(crate) struct ModelText {
    drivers: Vec<String>,
    parameters: Vec<(String, f64)>,
    positive: Vec<String>,
    assumptions: Vec<String>,
    correlation: Vec<(String, String, f64)>,
    states: String,
    derived: String,
    readouts: String,
}

impl ModelText {
    /// A model with these drivers.
    pub(crate) fn new(drivers: &[&str]) -> Self {
        Self {
            drivers: drivers.iter().map(ToString::to_string).collect(),
            ..Self::default()
        }
    }

    /// All the plain numbers among a case's parameters.
    pub(crate) fn parameters_of(mut self, case: &Case) -> Self {
        self.parameters.extend(case.values().0);
        self
    }

    /// Declares parameters to be positive, whatever their values.
    pub(crate) fn positive(mut self, names: &[&str]) -> Self {
        self.positive.extend(names.iter().map(ToString::to_string));
        self
    }

    /// An inequality between parameters.
    pub(crate) fn assumption(mut self, inequality: &str) -> Self {
        self.assumptions.push(inequality.into());
        self
    }

    /// A parameter.
    pub(crate) fn parameter(mut self, name: &str, value: f64) -> Self {
        self.parameters.retain(|(n, _)| n != name);
        self.parameters.push((name.into(), value));
        self
    }

    /// The correlation of two drivers.
    pub(crate) fn correlated(mut self, one: &str, other: &str, value: f64) -> Self {
        self.correlation.push((one.into(), other.into(), value));
        self
    }

    /// A state: name, initial, drift, diffusions by driver, further lines.
    pub(crate) fn state(
        mut self,
        name: &str,
        initial: &str,
        drift: &str,
        diffusion: &[(&str, &str)],
        more: &str,
    ) -> Self {
        let entries: Vec<String> = diffusion
            .iter()
            .map(|(d, f)| format!("{d} = \"{f}\""))
            .collect();
        let noise = if entries.is_empty() {
            String::new()
        } else {
            format!("diffusion = {{ {} }}\n", entries.join(", "))
        };
        write!(
            self.states,
            "[states.{name}]\ninitial = \"{initial}\"\ndrift = \"{drift}\"\n{noise}{more}\n"
        )
        .expect("writing to a string");
        self
    }

    /// A derived quantity.
    pub(crate) fn derived(mut self, name: &str, formula: &str) -> Self {
        writeln!(self.derived, "[derived.{name}]\nformula = \"{formula}\"")
            .expect("writing to a string");
        self
    }

    /// A readout.
    pub(crate) fn readout(mut self, name: &str, formula: &str) -> Self {
        writeln!(self.readouts, "[readouts.{name}]\nformula = \"{formula}\"")
            .expect("writing to a string");
        self
    }

    /// The text.
    pub(crate) fn text(&self, name: &str) -> String {
        let drivers: Vec<String> = self.drivers.iter().map(|d| format!("\"{d}\"")).collect();
        let mut text = format!(
            "[model]\nname = \"{name}\"\ndrivers = [{}]\n",
            drivers.join(", ")
        );
        text.push_str("[parameters]\n");
        for (name, value) in &self.parameters {
            let entry = if self.positive.contains(name) {
                format!("{{ value = {value:?}, range = \"(0, inf)\" }}")
            } else {
                format!("{value:?}")
            };
            writeln!(text, "{name} = {entry}").expect("writing to a string");
        }
        if !self.assumptions.is_empty() {
            text.push_str("[assumptions]\n");
            for (number, inequality) in self.assumptions.iter().enumerate() {
                writeln!(text, "a{number} = \"{inequality}\"").expect("writing to a string");
            }
        }
        if !self.correlation.is_empty() {
            text.push_str("[correlation]\n");
            for (one, other, value) in &self.correlation {
                writeln!(text, "{one}.{other} = \"{value:?}\"").expect("writing to a string");
            }
        }
        text + &self.states + &self.derived + &self.readouts
    }
}

/// The further lines of a state that is positive.
pub(crate) const POSITIVE: &str = "domain = \"(0, inf)\"";
