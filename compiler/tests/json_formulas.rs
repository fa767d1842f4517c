//! Formulas in the JSON of a derivation: all of them parse, whatever their size, and mean what was derived.

mod large;

use std::collections::BTreeMap;

use driftwright::front::formula::parse_in_pool;
use driftwright::pipeline::{Compiled, compile};
use driftwright::report::{self, Derivation};
use driftwright::source::SourceFile;
use driftwright::symbolic::{Expr, Symbol, SymbolKind};
use serde_json::Value;

fn compiled(text: &str) -> Compiled {
    let compilation = compile(&SourceFile::new("long.toml", text));
    compilation.compiled.expect("a model without errors")
}

fn json(compiled: &Compiled) -> Value {
    report::json::derivation(&Derivation::new(compiled, &[]))
}

/// Reads formulas of a document back into the pool they came from.
struct Reader<'a> {
    compiled: &'a Compiled,
    parts: BTreeMap<Symbol, Expr>,
}

impl<'a> Reader<'a> {
    fn new(compiled: &'a Compiled, document: &Value) -> Self {
        let parts = BTreeMap::new();
        let mut reader = Self { compiled, parts };
        let none = serde_json::Map::new();
        for (name, text) in document["where"].as_object().unwrap_or(&none) {
            let formula = reader.read(text);
            let symbol = compiled.model.pool.symbol(name, SymbolKind::Auxiliary);
            reader.parts.insert(symbol, formula);
        }
        reader
    }

    fn read(&self, text: &Value) -> Expr {
        let (pool, text) = (&self.compiled.model.pool, text.as_str().expect("a string"));
        let formula = parse_in_pool(pool, text);
        let formula = formula.unwrap_or_else(|found| panic!("{found:?} in {text}"));
        pool.substitute(formula, &self.parts)
    }

    fn assert_same(&self, text: &Value, derived: Expr) {
        let pool = &self.compiled.model.pool;
        let read = self.read(text);
        assert!(
            read == derived || pool.equal(read, derived).is_yes(),
            "{text}"
        );
    }
}

/// Holds every formula of states and derived quantities to what was derived.
fn assert_reads_back(text: &str) -> Value {
    let compiled = compiled(text);
    let document = json(&compiled);
    let reader = Reader::new(&compiled, &document);
    for (state, process) in compiled.model.states.iter().zip(&compiled.dynamics.states) {
        reader.assert_same(&document["states"][&state.name]["drift"], process.drift);
    }
    for (derived, expansion) in compiled
        .model
        .derived
        .iter()
        .zip(&compiled.dynamics.derived)
    {
        let entry = &document["derived"][&derived.name];
        reader.assert_same(&entry["formula"], expansion.formula);
        reader.assert_same(&entry["drift"], expansion.drift);
        reader.assert_same(&entry["chain_rule_drift"], expansion.chain_rule_drift);
        reader.assert_same(&entry["ito_correction"], expansion.ito_correction);
        reader.assert_same(&entry["diffusion"]["W"], expansion.diffusion[0]);
    }
    document
}

#[test]
fn long_sums_are_whole() {
    let document = assert_reads_back(&large::long_drift(1_000));
    let drift = document["states"]["X"]["drift"].as_str().expect("a string");
    assert!(drift.len() > 10_000);
    assert!(document.get("where").is_none());
}

#[test]
fn deep_formulas_name_their_parts() {
    // Deeper than a formula of one text may nest.
    let document = assert_reads_back(&large::chain(230, "sin(D) + X"));
    assert!(
        document["where"]
            .as_object()
            .is_some_and(|parts| parts.len() > 200)
    );
}

#[test]
fn products_that_would_double_with_each_level() {
    assert_reads_back(&large::chain(25, "sin(D)*D"));
}

#[test]
fn names_of_the_model_are_not_taken() {
    let text = large::chain(30, "sin(D)*D").replace("[derived.D3]", "[derived.p1]");
    let text = text.replace("D3)", "p1)").replace("*D3\"", "*p1\"");
    let document = assert_reads_back(&text);
    assert!(document["where"].get("p1").is_none());
    assert!(document["where"].get("p2").is_some() || document["where"].get("pp2").is_some());
}

#[test]
fn text_grows_in_proportion() {
    let length = |count| {
        let compiled = compiled(&large::chain(count, "sin(D) + X"));
        json(&compiled).to_string().len()
    };
    let (small, large) = (length(60), length(240));
    assert!(large < 5 * small, "{small} to {large} bytes");
}
