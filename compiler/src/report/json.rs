//! The derivation for programs. Formulas are strings in the grammar of the model file, none of them cut.
//! A formula too long or too deep for one string names parts of itself, which stand under `where`, as they
//! would in a model file: each once, however many formulas read it, in an order in which each reads only
//! those before it.

use serde_json::{Map, Value, json};

use super::Derivation;
use crate::analysis::claims::ClaimResult;
use crate::analysis::condition::{All, Condition, all_standing};
use crate::analysis::facts::Fact;
use crate::calculus::Expansion;
use crate::diagnostic::diagnostic_json;
use crate::model::{Calculus, Model};
use crate::pipeline::Suggestion;
use crate::scheme::{Group, Order, Plan};
use crate::symbolic::{Expr, Pool, SharedTexts, Witness};

/// `derive --format json`.
pub fn derivation(derivation: &Derivation<'_>) -> Value {
    let (model, dynamics) = (derivation.model, derivation.dynamics);
    let derived = model.derived.iter().map(|d| d.name.clone());
    document(derivation, derived.zip(&dynamics.derived))
}

/// `derive --of FORMULA --format json`: the result stands under `derived` with the key `of`.
pub fn on_the_spot(derivation: &Derivation<'_>, expansion: &Expansion) -> Value {
    document(derivation, std::iter::once(("of".to_owned(), expansion)))
}

fn document<'e>(
    derivation: &Derivation<'_>,
    derived: impl Iterator<Item = (String, &'e Expansion)>,
) -> Value {
    let model = derivation.model;
    let texts = SharedTexts::new(&model.pool, |name| is_taken(model, name));
    let texts = &texts;
    let states: Map<String, Value> = model
        .states
        .iter()
        .zip(&derivation.dynamics.states)
        .map(|(s, process)| {
            let drift = texts.format(process.drift);
            let diffusion = diffusion(model, texts, &process.diffusion);
            (
                s.name.clone(),
                json!({ "drift": drift, "diffusion": diffusion }),
            )
        })
        .collect();
    let derived: Map<String, Value> = derived
        .map(|(name, e)| (name, expansion(model, texts, e)))
        .collect();
    let methods: Vec<Value> = derivation
        .plan
        .groups
        .iter()
        .map(|g| method(model, texts, derivation.plan, g))
        .collect();
    let suggestions: Vec<Value> = derivation.suggestions.iter().map(suggestion).collect();
    let facts: Vec<Value> = derivation
        .facts
        .iter()
        .map(|f| fact(model, texts, f))
        .collect();
    let claims: Map<String, Value> = derivation
        .claims
        .iter()
        .map(|c| (c.name.clone(), claim(&model.pool, texts, c)))
        .collect();
    let diagnostics: Vec<Value> = derivation
        .diagnostics
        .iter()
        .map(|d| diagnostic_json(&model.source, d))
        .collect();
    let mut document = json!({
        "model": model.name,
        "calculus": match model.calculus {
            Calculus::Ito => "ito",
            Calculus::Stratonovich => "stratonovich",
        },
        "states": states,
        "derived": derived,
        "methods": methods,
        "suggestions": suggestions,
        "facts": facts,
        "claims": claims,
        "diagnostics": diagnostics,
    });
    let parts = texts.definitions();
    if !parts.is_empty() {
        let parts: Map<String, Value> = parts.into_iter().map(|(k, v)| (k, v.into())).collect();
        document["where"] = parts.into();
    }
    document
}

/// Whether a name means something in the model file.
fn is_taken(model: &Model, name: &str) -> bool {
    let named = model
        .derived
        .iter()
        .chain(&model.readouts)
        .chain(&model.wheres);
    named.into_iter().any(|n| n.name == name) || model.drivers.iter().any(|d| d.name == name)
}

/// Coefficients by driver; zero entries are left out.
fn diffusion(model: &Model, texts: &SharedTexts<'_>, coefficients: &[Expr]) -> Map<String, Value> {
    let pool = &model.pool;
    model
        .drivers
        .iter()
        .zip(coefficients)
        .filter(|(_, c)| !pool.is_zero_literal(**c))
        .map(|(d, c)| (d.name.clone(), Value::from(texts.format(*c))))
        .collect()
}

fn expansion(model: &Model, texts: &SharedTexts<'_>, expansion: &Expansion) -> Value {
    json!({
        "formula": texts.format(expansion.formula),
        "drift": texts.format(expansion.drift),
        "diffusion": diffusion(model, texts, &expansion.diffusion),
        "chain_rule_drift": texts.format(expansion.chain_rule_drift),
        "ito_correction": texts.format(expansion.ito_correction),
    })
}

/// An order as a number: 1, 0.5; null where there is none.
fn order(order: Option<Order>) -> Value {
    match order {
        None => Value::Null,
        Some(order) if order.denominator == 1 => Value::from(order.numerator),
        Some(order) => Value::from(order.value()),
    }
}

fn method(model: &Model, texts: &SharedTexts<'_>, plan: &Plan, group: &Group) -> Value {
    let names: Vec<&str> = group
        .states
        .iter()
        .map(|&s| model.states[s].name.as_str())
        .collect();
    let through: Map<String, Value> = super::methods::changed(model, plan, group)
        .map(|c| {
            (
                model.states[c.state].name.clone(),
                Value::from(texts.format(c.forward)),
            )
        })
        .collect();
    let rejected: Vec<Value> = group
        .rejected
        .iter()
        .map(|(s, why)| json!({ "scheme": s.name(), "reason": why }))
        .collect();
    json!({
        "states": names,
        "kind": group.kind.name(),
        "law": group.law.map(|l| l.name()),
        "through": through,
        "becomes": group.becomes.map(|b| b.name()),
        "scheme": group.scheme.name(),
        "strong_order": order(group.strong_order),
        "weak_order": order(group.weak_order),
        "preserves_domain": group.preserves_domain,
        "reasons": group.reasons,
        "rejected": rejected,
    })
}

/// A suggestion lives in a model of its own.
fn suggestion(suggestion: &Suggestion) -> Value {
    let model = &suggestion.model;
    let pool = &model.pool;
    let (coordinate, process) = suggestion.coordinate();
    let write: Map<String, Value> = suggestion
        .write
        .iter()
        .map(|(key, value)| ((*key).to_owned(), value.clone().into()))
        .collect();
    let noise = model.drivers.iter().zip(&process.diffusion);
    let diffusion: Map<String, Value> = noise
        .filter(|(_, c)| !pool.is_zero_literal(**c))
        .map(|(d, c)| (d.name.clone(), Value::from(pool.format(*c))))
        .collect();
    let group = suggestion.group();
    json!({
        "state": model.states[suggestion.state].name,
        "write": write,
        "leave_out": suggestion.leave_out,
        "kind": group.kind.name(),
        "law": group.law.map(|l| l.name()),
        "scheme": group.scheme.name(),
        "preserves_domain": group.preserves_domain,
        "coordinate": pool.format(coordinate),
        "drift": pool.format(process.drift),
        "diffusion": diffusion,
    })
}

fn fact(model: &Model, texts: &SharedTexts<'_>, fact: &Fact) -> Value {
    let names: Vec<&str> = fact
        .states
        .iter()
        .map(|&s| model.states[s].name.as_str())
        .collect();
    let sides = |c: &Condition| {
        format!(
            "{} {} {}",
            texts.format(c.left),
            c.relates.sign(),
            texts.format(c.right)
        )
    };
    let all = |when: &All| when.iter().map(sides).collect::<Vec<String>>();
    let classes: Vec<Value> = fact
        .classes
        .iter()
        .map(|(class, when)| {
            let standing = all_standing(model, when).name();
            json!({ "class": class, "when": all(when), "standing": standing })
        })
        .collect();
    let alternatives = fact.condition.as_ref();
    json!({
        "topic": fact.topic.name(),
        "states": names,
        "statement": fact.statement,
        "condition": fact.condition_text(model),
        "any_of": alternatives.map(|a| a.iter().map(all).collect::<Vec<_>>()),
        "standing": fact.standing.name(),
        "checked_at_run_time": fact.to_check(model).is_some(),
        "classes": classes,
        "because": fact.because,
    })
}

fn claim(pool: &Pool, texts: &SharedTexts<'_>, result: &ClaimResult) -> Value {
    let mut entry = Map::new();
    entry.insert("verdict".to_owned(), result.verdict.name().into());
    entry.insert("reason".to_owned(), result.reason.clone().into());
    if let Some(local) = result.local {
        entry.insert("local".to_owned(), local.name().into());
    }
    let sides = [
        ("derived", result.derived),
        ("claimed", result.claimed),
        ("difference", result.difference),
    ];
    for (key, side) in sides {
        if let Some(side) = side {
            entry.insert(key.to_owned(), texts.format(side).into());
        }
    }
    if let Some(witness) = &result.witness {
        entry.insert("witness".to_owned(), self::witness(pool, witness));
    }
    entry.into()
}

fn witness(pool: &Pool, witness: &Witness) -> Value {
    let point: Map<String, Value> = witness
        .point
        .iter()
        .map(|(symbol, value)| (pool.symbol_name(*symbol).to_string(), Value::from(*value)))
        .collect();
    json!({ "point": point, "left": witness.left, "right": witness.right })
}
