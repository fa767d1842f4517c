//! What the tests of the calculus share: models from the entries of the reference files, and formulas
//! in the pool of a compiled model.

use std::collections::BTreeMap;
use std::fmt::Write;

use driftwright::diagnostic::human;
use driftwright::pipeline::{Compiled, compile};
use driftwright::source::SourceFile;
use driftwright::symbolic::{Expr, Symbol};
use serde::Deserialize;

/// A system of equations as the reference files write it.
#[derive(Clone, Debug, Deserialize)]
pub(crate) struct Equations {
    /// Names of the states.
    #[serde(alias = "vars")]
    pub(crate) states: Vec<String>,
    /// Their drifts.
    pub(crate) drift: Vec<String>,
    /// `diffusion[state][driver]`.
    pub(crate) diffusion: Vec<Vec<String>>,
    /// Values of the parameters.
    pub(crate) params: BTreeMap<String, f64>,
}

/// How a model text is built from [`Equations`].
#[derive(Clone, Debug, Default)]
pub(crate) struct Shape {
    /// `ito` or `stratonovich`.
    pub(crate) calculus: &'static str,
    /// Pairs of drivers, from 1, with their correlation.
    pub(crate) correlation: Vec<(usize, usize, String)>,
    /// Names that may be negative.
    pub(crate) signed: Vec<String>,
    /// Values at time 0; 1 where none is given.
    pub(crate) initial: Vec<f64>,
    /// Ranges by parameter; `(0, inf)` where none is given, the line for signed ones.
    pub(crate) ranges: BTreeMap<String, String>,
    /// Domains by state; positive states have `(0, inf)`, the others the whole line.
    pub(crate) domains: BTreeMap<String, String>,
    /// `[derived]`, `[claims]` and so on.
    pub(crate) rest: String,
}

impl Equations {
    /// The text of a model file.
    pub(crate) fn text(&self, shape: &Shape) -> String {
        let drivers = self.diffusion.first().map_or(0, Vec::len);
        let names: Vec<String> = (1..=drivers).map(|j| format!("\"dr{j}\"")).collect();
        let mut text = format!(
            "[model]\nname = \"case\"\ncalculus = \"{}\"\ndrivers = [{}]\n\n[parameters]\n",
            shape.calculus,
            names.join(", ")
        );
        for (name, value) in &self.params {
            let usual = if shape.signed.contains(name) {
                "(-inf, inf)"
            } else {
                "(0, inf)"
            };
            let range = shape.ranges.get(name).map_or(usual, String::as_str);
            writeln!(
                text,
                "{name} = {{ value = {value:?}, range = \"{range}\" }}"
            )
            .unwrap();
        }
        text += "\n[correlation]\n";
        for (i, j, rho) in &shape.correlation {
            writeln!(text, "dr{i}.dr{j} = \"{rho}\"").unwrap();
        }
        for (i, name) in self.states.iter().enumerate() {
            let initial = shape.initial.get(i).copied().unwrap_or(1.0);
            writeln!(
                text,
                "\n[states.{name}]\ninitial = \"{initial}\"\ndrift = \"{}\"",
                self.drift[i]
            )
            .unwrap();
            let noise = self.diffusion[i]
                .iter()
                .enumerate()
                .filter(|(_, b)| *b != "0");
            let noise: Vec<String> = noise
                .map(|(j, b)| format!("dr{} = \"{b}\"", j + 1))
                .collect();
            writeln!(text, "diffusion = {{ {} }}", noise.join(", ")).unwrap();
            match shape.domains.get(name) {
                Some(domain) => writeln!(text, "{domain}").unwrap(),
                None if shape.signed.contains(name) => {}
                None => writeln!(text, "domain = \"(0, inf)\"").unwrap(),
            }
        }
        text + "\n" + &shape.rest
    }
}

/// Compiles a model text, with its diagnostics for people.
pub(crate) fn compile_text(text: &str) -> (Option<Compiled>, String) {
    let source = SourceFile::new("case.toml", text);
    let compilation = compile(&source);
    let shown = human(&source, &compilation.diagnostics, false);
    (compilation.compiled, shown)
}

/// Compiles a model text that must resolve.
pub(crate) fn compiled(text: &str) -> Compiled {
    let (compiled, shown) = compile_text(text);
    compiled.unwrap_or_else(|| panic!("the model does not resolve:\n{text}\n{shown}"))
}

/// A derived quantity of a compiled model, by name.
pub(crate) fn derived(compiled: &Compiled, name: &str) -> Expr {
    let model = &compiled.model;
    model
        .derived
        .iter()
        .find(|d| d.name == name)
        .expect("it is declared")
        .formula
        .expr
}

/// Values by name as values by symbol.
pub(crate) fn at(compiled: &Compiled, values: &BTreeMap<String, f64>) -> BTreeMap<Symbol, f64> {
    let find = |name: &String| compiled.model.pool.find_symbol(name);
    values
        .iter()
        .filter_map(|(name, &value)| Some((find(name)?, value)))
        .collect()
}

/// Whether two numbers agree to a relative and an absolute tolerance.
pub(crate) fn close(a: f64, b: f64, relative: f64, absolute: f64) -> bool {
    (a - b).abs() <= relative * a.abs().max(b.abs()) + absolute
}
