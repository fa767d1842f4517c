//! The derivation for programs. Formulas are strings in the grammar of the model file.

use serde_json::{Map, Value, json};

use super::Derivation;
use crate::analysis::claims::ClaimResult;
use crate::calculus::Expansion;
use crate::diagnostic::diagnostic_json;
use crate::model::{Calculus, Model};
use crate::scheme::{Group, Order, Plan};
use crate::symbolic::{Expr, Pool, Witness};

/// `derive --format json`.
pub fn derivation(derivation: &Derivation<'_>) -> Value {
    let (model, dynamics) = (derivation.model, derivation.dynamics);
    let derived = model.derived.iter().zip(&dynamics.derived);
    let derived: Map<String, Value> = derived
        .map(|(d, expansion)| (d.name.clone(), self::expansion(model, expansion)))
        .collect();
    document(derivation, derived)
}

/// `derive --of FORMULA --format json`: the result stands under `derived` with the key `of`.
pub fn on_the_spot(derivation: &Derivation<'_>, expansion: &Expansion) -> Value {
    let derived = Map::from_iter([(
        "of".to_owned(),
        self::expansion(derivation.model, expansion),
    )]);
    document(derivation, derived)
}

fn document(derivation: &Derivation<'_>, derived: Map<String, Value>) -> Value {
    let model = derivation.model;
    let pool = &model.pool;
    let states: Map<String, Value> = model
        .states
        .iter()
        .zip(&derivation.dynamics.states)
        .map(|(s, process)| {
            let drift = pool.format(process.drift);
            (
                s.name.clone(),
                json!({ "drift": drift, "diffusion": diffusion(model, &process.diffusion) }),
            )
        })
        .collect();
    let methods: Vec<Value> = derivation
        .plan
        .groups
        .iter()
        .map(|g| method(model, derivation.plan, g))
        .collect();
    let claims: Map<String, Value> = derivation
        .claims
        .iter()
        .map(|c| (c.name.clone(), claim(pool, c)))
        .collect();
    let diagnostics: Vec<Value> = derivation
        .diagnostics
        .iter()
        .map(|d| diagnostic_json(&model.source, d))
        .collect();
    json!({
        "model": model.name,
        "calculus": match model.calculus {
            Calculus::Ito => "ito",
            Calculus::Stratonovich => "stratonovich",
        },
        "states": states,
        "derived": derived,
        "methods": methods,
        "claims": claims,
        "diagnostics": diagnostics,
    })
}

/// Coefficients by driver; zero entries are left out.
fn diffusion(model: &Model, coefficients: &[Expr]) -> Map<String, Value> {
    let pool = &model.pool;
    model
        .drivers
        .iter()
        .zip(coefficients)
        .filter(|(_, c)| !pool.is_zero_literal(**c))
        .map(|(d, c)| (d.name.clone(), Value::from(pool.format(*c))))
        .collect()
}

fn expansion(model: &Model, expansion: &Expansion) -> Value {
    let pool = &model.pool;
    json!({
        "formula": pool.format(expansion.formula),
        "drift": pool.format(expansion.drift),
        "diffusion": diffusion(model, &expansion.diffusion),
        "chain_rule_drift": pool.format(expansion.chain_rule_drift),
        "ito_correction": pool.format(expansion.ito_correction),
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

fn method(model: &Model, plan: &Plan, group: &Group) -> Value {
    let names: Vec<&str> = group
        .states
        .iter()
        .map(|&s| model.states[s].name.as_str())
        .collect();
    let through: Map<String, Value> = super::methods::changed(model, plan, group)
        .map(|c| {
            (
                model.states[c.state].name.clone(),
                Value::from(model.pool.format(c.forward)),
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

fn claim(pool: &Pool, result: &ClaimResult) -> Value {
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
            entry.insert(key.to_owned(), pool.format(side).into());
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
