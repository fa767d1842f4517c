//! The catalogue of stochastic differential equations in `tests/reference/exact.toml` as model files.

use std::fmt::Write;

/// An equation of the catalogue with the verdict an honest matcher returns.
#[derive(Clone)]
pub(crate) struct Sde {
    pub(crate) id: String,
    pub(crate) class: String,
    pub(crate) entry: toml::Table,
}

/// Every entry of the catalogue.
pub(crate) fn catalogue() -> Vec<Sde> {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/../tests/reference/exact.toml");
    let all: toml::Table = std::fs::read_to_string(path).unwrap().parse().unwrap();
    let entries = all["sde"].as_array().unwrap();
    let read = |entry: &toml::Value| Sde {
        id: entry["id"].as_str().unwrap().to_owned(),
        class: entry["expect"]["class"].as_str().unwrap().to_owned(),
        entry: entry.as_table().unwrap().clone(),
    };
    entries.iter().map(read).collect()
}

impl Sde {
    /// The names of the states, in order.
    pub(crate) fn states(&self) -> Vec<String> {
        strings(&self.entry["states"])
    }

    /// The same equation with another drift for one state.
    pub(crate) fn with_drift(&self, state: &str, drift: &str) -> Self {
        let mut changed = self.clone();
        changed.entry["drift"][state] = toml::Value::String(drift.to_owned());
        changed
    }

    /// The same equation with another coefficient of a driver.
    pub(crate) fn with_diffusion(&self, state: &str, driver: &str, coefficient: &str) -> Self {
        let mut changed = self.clone();
        changed.entry["diffusion"][state][driver] = toml::Value::String(coefficient.to_owned());
        changed
    }

    /// The equation as a model file. The catalogue leaves open whether a finite end belongs to the
    /// domain: it does in the square-root class only.
    pub(crate) fn text(&self) -> String {
        let e = &self.entry;
        let mut text = format!(
            "[model]\nname = \"m\"\ndrivers = {:?}\n[parameters]\n",
            strings(&e["drivers"])
        );
        for (name, value) in e["params"].as_table().unwrap() {
            let range = match e["param_domain"][name].as_str().unwrap() {
                "real" => "(-inf, inf)",
                range => range,
            };
            writeln!(
                text,
                "{name} = {{ value = {}, range = \"{range}\" }}",
                number(value)
            )
            .unwrap();
        }
        for triple in e
            .get("corr")
            .and_then(toml::Value::as_array)
            .into_iter()
            .flatten()
        {
            let [a, b, rho] = &strings(triple)[..] else {
                panic!("a correlation is a triple")
            };
            writeln!(text, "[correlation]\n{a}.{b} = \"{rho}\"").unwrap();
        }
        for state in self.states() {
            let diffusion: Vec<String> = e["diffusion"][&state]
                .as_table()
                .unwrap()
                .iter()
                .map(|(driver, b)| format!("{driver} = \"{}\"", formula(b.as_str().unwrap())))
                .collect();
            let drift = formula(e["drift"][&state].as_str().unwrap());
            writeln!(
                text,
                "[states.{state}]\ninitial = \"{}\"\ndrift = \"{drift}\"",
                number(&e["x0"][&state])
            )
            .unwrap();
            writeln!(text, "diffusion = {{ {} }}", diffusion.join(", ")).unwrap();
            text += &self.domain(&state);
        }
        text
    }

    fn domain(&self, state: &str) -> String {
        let [lower, upper] = &self.entry["domain"][state].as_array().unwrap()[..] else {
            panic!("a domain has two ends")
        };
        let (lower, upper) = (lower.as_float().unwrap(), upper.as_float().unwrap());
        let closed = self.class == "cir" && lower == 0.0;
        let (bracket, rule) = if closed {
            ("[", "at_edge = \"as_equation\"\n")
        } else {
            ("(", "")
        };
        format!("domain = \"{bracket}{lower}, {upper})\"\n{rule}")
    }
}

fn number(value: &toml::Value) -> f64 {
    value.as_float().unwrap()
}

/// The catalogue's names of the normal law's functions in ours.
pub(crate) fn formula(text: &str) -> String {
    text.replace("Phiinv(", "normal_quantile(")
        .replace("phi(", "normal_pdf(")
}

fn strings(value: &toml::Value) -> Vec<String> {
    value
        .as_array()
        .unwrap()
        .iter()
        .map(|v| v.as_str().unwrap().to_owned())
        .collect()
}
