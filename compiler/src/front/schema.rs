//! The JSON Schema of the model file, for editors that complete and check TOML.
//!
//! The schema knows keys and shapes; what formulas mean is checked by `check`.

use serde_json::{Map, Value, json};

use super::raw::keys;
use crate::model::SchemeName;

/// The schema, in the 2020-12 dialect.
///
/// ```
/// let schema = driftwright::front::json_schema();
/// assert_eq!(schema["properties"]["model"]["required"][0], "name");
/// ```
pub fn json_schema() -> Value {
    json!({
        "$schema": "https://json-schema.org/draft/2020-12/schema",
        "title": "driftwright model",
        "description": "A model written as stochastic differential equations.",
        "type": "object",
        "required": ["model", "states"],
        "additionalProperties": false,
        "properties": {
            "model": model(),
            "parameters": parameters(),
            "assumptions": named(
                "Named inequalities between parameters: the analysis may use them, the generated code checks them.",
                text("An inequality with <, <=, > or >=.", json!(["2*mu >= sigma^2"])),
            ),
            "correlation": correlation(),
            "states": named("The states, each with its equation.", state()),
            "derived": named(
                "Twice differentiable functions of the states; Ito's rule gives their dynamics.",
                quantity("log(S)"),
            ),
            "where": named("Sub-expressions, usable in any formula.", formula("The sub-expression.", "sigma*sqrt(S)")),
            "readouts": named(
                "Any functions of the states, kinks welcome.",
                quantity("exp(-mu*t)*max(S - 40, 0)"),
            ),
            "claims": named("What the author derived on paper; each is proved, refuted or left open.", claim()),
        },
        "$defs": {
            "name": { "type": "string", "pattern": NAME, "description": "A name: letters, digits and _, a letter first." },
            "formula": { "type": "string", "minLength": 1, "description": "A formula in + - * / ^, numbers, names, t, pi and functions." },
            "interval": {
                "type": "string",
                "description": "An interval; its ends are formulas in the parameters.",
                "pattern": "^\\s*[(\\[].*,.*[)\\]]\\s*$",
                "examples": ["(0, inf)", "[0, 1]", "(-inf, inf)"],
            },
        },
    })
}

/// Marks stand for accents that are yet to be composed with their letters.
const NAME: &str = "^\\p{L}[\\p{L}\\p{M}0-9_]*$";

fn model() -> Value {
    table(
        "What the model is called and how it is read.",
        &["name"],
        json!({
            "name": { "type": "string", "pattern": "^[a-z][a-z0-9_]*$", "description": "snake_case; it names the generated module.", "examples": ["orchard_spot"] },
            "title": text("One line for people.", json!(["Spot price of cider apples, one factor"])),
            "about": text("Longer text for the dossier.", json!([])),
            "time_unit": text("Unit of the time t.", json!(["year", "day"])),
            "calculus": { "enum": keys::CALCULI, "default": "ito", "description": "How the stochastic integrals are read; Stratonovich models are converted." },
            "drivers": { "type": "array", "items": { "$ref": "#/$defs/name" }, "uniqueItems": true, "description": "The Brownian motions.", "examples": [["W"], ["W", "B"]] },
        }),
    )
}

fn parameters() -> Value {
    let full = table(
        "A parameter with its range and meaning.",
        &[],
        json!({
            "value": { "type": "number", "description": "Default value; without it the caller must give one." },
            "unit": text("Unit.", json!(["1/year"])),
            "about": text("What it is.", json!(["growth rate"])),
            "range": { "$ref": "#/$defs/interval" },
        }),
    );
    let short = json!({ "type": "number", "description": "Only a default value." });
    named("The parameters.", json!({ "anyOf": [short, full] }))
}

fn correlation() -> Value {
    let entry = formula("The correlation, in parameters and t.", "rho");
    named(
        "Correlations of pairs of drivers, each pair once: W.B = \"rho\". Pairs not named are independent.",
        named("Correlations with this driver.", entry),
    )
}

fn state() -> Value {
    let edge = json!({ "enum": keys::EDGE_WORDS });
    let mut ends = table(
        "What happens at each closed end.",
        &[],
        json!({ "lower": edge, "upper": edge }),
    );
    ends["minProperties"] = json!(1);
    table(
        "A state and its equation.",
        &["initial", "drift"],
        json!({
            "about": text("What it is.", json!(["spot price"])),
            "unit": text("Unit.", json!(["EUR/t"])),
            "initial": formula("Value at time 0, in the parameters.", "S0"),
            "drift": formula("Coefficient of dt, in t, parameters and states.", "mu*S"),
            "diffusion": per_driver("Coefficient of the drivers' increments; left out where there is no noise."),
            "domain": { "$ref": "#/$defs/interval", "description": "Where the state lives; the whole line by default." },
            "at_edge": { "anyOf": [edge, ends], "description": "What the state does at a closed end of its domain." },
            "through": formula("Coordinate to simulate in: strictly monotone in this state.", "log(S)"),
            "scheme": { "enum": SchemeName::ALL.map(SchemeName::name), "description": "Overrides the automatic choice of the scheme." },
        }),
    )
}

fn quantity(example: &str) -> Value {
    table(
        "A quantity computed from the states.",
        &["formula"],
        json!({
            "formula": formula("The quantity, in t, parameters, states and derived quantities.", example),
            "about": text("What it is.", json!([])),
            "unit": text("Unit.", json!([])),
        }),
    )
}

fn claim() -> Value {
    let of = |text: &str| formula(text, "log(S)");
    let properties = json!({
        "drift_of": of("The formula whose Ito drift is claimed."),
        "diffusion_of": of("The formula whose diffusion is claimed."),
        "martingale": formula("The formula claimed to be a true martingale.", "exp(-mu*t)*S"),
        "mean_of": of("The formula whose mean at time t is claimed."),
        "variance_of": of("The formula whose variance at time t is claimed."),
        "covariance_of": { "type": "array", "items": { "$ref": "#/$defs/formula" }, "minItems": 2, "maxItems": 2, "description": "The two formulas whose covariance at time t is claimed.", "examples": [["X", "Y"]] },
        "law_of": of("The formula whose law at time t is claimed."),
        "is": per_driver("The claimed value, or the name of the claimed law."),
    });
    let kinds = &keys::CLAIM[..keys::CLAIM.len() - 1];
    let one: Vec<Value> = kinds
        .iter()
        .map(|&kind| {
            if kind == "martingale" {
                json!({ "required": [kind] })
            } else {
                json!({ "required": [kind, "is"] })
            }
        })
        .collect();
    let mut claim = table(
        "A claim: what it is about, and the claimed value.",
        &[],
        properties,
    );
    claim["oneOf"] = Value::Array(one);
    claim
}

fn per_driver(description: &str) -> Value {
    json!({
        "description": description,
        "anyOf": [
            { "$ref": "#/$defs/formula" },
            { "type": "object", "additionalProperties": { "$ref": "#/$defs/formula" }, "description": "A formula a driver." },
        ],
        "examples": ["sigma*S", { "W": "sigma*S", "B": "eta" }],
    })
}

fn formula(description: &str, example: &str) -> Value {
    json!({ "$ref": "#/$defs/formula", "description": description, "examples": [example] })
}

fn text(description: &str, examples: Value) -> Value {
    let mut text = json!({ "type": "string", "description": description });
    if examples.as_array().is_some_and(|list| !list.is_empty()) {
        text["examples"] = examples;
    }
    text
}

/// A table with exactly these keys.
fn table(description: &str, required: &[&str], properties: Value) -> Value {
    json!({
        "type": "object",
        "description": description,
        "required": required,
        "additionalProperties": false,
        "properties": properties,
    })
}

/// A table whose keys are names the author chooses.
fn named(description: &str, entry: Value) -> Value {
    let mut table = Map::new();
    table.insert("type".to_owned(), json!("object"));
    table.insert("description".to_owned(), json!(description));
    table.insert(
        "propertyNames".to_owned(),
        json!({ "$ref": "#/$defs/name" }),
    );
    table.insert("additionalProperties".to_owned(), entry);
    Value::Object(table)
}

#[cfg(test)]
mod tests {
    use serde_json::Value;

    use super::{json_schema, keys};

    fn properties(value: &Value) -> Vec<&str> {
        value["properties"]
            .as_object()
            .unwrap()
            .keys()
            .map(String::as_str)
            .collect()
    }

    /// The schema offers exactly the keys the reader accepts.
    #[test]
    fn schema_and_reader_know_the_same_keys() {
        let schema = json_schema();
        let top = &schema["properties"];
        let sorted = |list: &[&str]| {
            let mut list: Vec<String> = list.iter().map(|key| (*key).to_owned()).collect();
            list.sort();
            list
        };
        let entry = |section: &str| &top[section]["additionalProperties"];
        let cases = [
            (&schema, keys::FILE),
            (&top["model"], keys::MODEL),
            (&entry("parameters")["anyOf"][1], keys::PARAMETER),
            (entry("states"), keys::STATE),
            (
                &entry("states")["properties"]["at_edge"]["anyOf"][1],
                keys::EDGES,
            ),
            (entry("derived"), keys::NAMED),
            (entry("readouts"), keys::NAMED),
            (entry("claims"), keys::CLAIM),
        ];
        for (table, known) in cases {
            assert_eq!(sorted(&properties(table)), sorted(known));
        }
    }
}
