//! How the states are stepped, and why.

use std::collections::BTreeSet;

use super::document::{Align, Equation, Inline, Mark, Table, Term, code, prose, words};
use super::{Derivation, Document, trace};
use crate::model::Model;
use crate::scheme::{Becomes, Coordinate, Group, Method, Plan};

fn states(model: &Model, group: &Group) -> String {
    let names: Vec<&str> = group
        .states
        .iter()
        .map(|&s| model.states[s].name.as_str())
        .collect();
    names.join(", ")
}

/// The coordinates of a group that are not the states themselves.
pub(super) fn changed<'a>(
    model: &'a Model,
    plan: &'a Plan,
    group: &'a Group,
) -> impl Iterator<Item = &'a Coordinate> {
    let itself = |c: &Coordinate| c.forward == model.pool.var(model.states[c.state].symbol);
    group
        .states
        .iter()
        .map(|&s| &plan.coordinates[s])
        .filter(move |c| !itself(c))
}

/// A name such as `ornstein_uhlenbeck` as words.
fn spoken(name: &str) -> String {
    match name {
        "arithmetic_brownian_motion" => "Brownian motion with drift".to_owned(),
        "ornstein_uhlenbeck" => "an Ornstein-Uhlenbeck process".to_owned(),
        "linear_gaussian_system" => "a linear Gaussian system".to_owned(),
        "square_root" => "a square-root process".to_owned(),
        "brownian_motion_with_random_drift" => "a Brownian motion with a random drift".to_owned(),
        "bessel_with_drift" => "Bessel process with drift".to_owned(),
        "commuting_linear_flow" => "commuting linear flows".to_owned(),
        "transformed_bessel_with_drift" => "transformed Bessel process with drift".to_owned(),
        "euler_maruyama" => "Euler-Maruyama".to_owned(),
        "milstein" => "Milstein".to_owned(),
        "full_truncation_euler" => "Euler with full truncation".to_owned(),
        "runge_kutta_4" => "Runge-Kutta of order 4".to_owned(),
        "drift_implicit_euler" => "drift-implicit Euler".to_owned(),
        "tamed_euler" => "tamed Euler".to_owned(),
        "antithetic_milstein" => "antithetic Milstein".to_owned(),
        "tamed_milstein" => "tamed Milstein".to_owned(),
        "quadratic_exponential" => "quadratic-exponential".to_owned(),
        "conditional_gaussian" => "normal given a square-root process".to_owned(),
        "strong_taylor_1_5" => "strong Taylor of order 1.5".to_owned(),
        other => other.replace('_', " "),
    }
}

fn orders(group: &Group) -> String {
    match (group.strong_order, group.weak_order) {
        (None, None) => "orders not known".to_owned(),
        (Some(strong), None) => format!("strong order {strong}, weak order not known"),
        (None, Some(weak)) => format!("strong order not known, weak order {weak}"),
        (Some(strong), Some(weak)) => format!("strong order {strong}, weak order {weak}"),
    }
}

/// One line about a group: what it is stepped by and why that is right.
pub fn method_line(model: &Model, plan: &Plan, group: &Group) -> String {
    let mut line = if group.is_exact() {
        match (group.law, group.becomes) {
            (None, Some(Becomes::LinearFlow)) => "exact: the solution".to_owned(),
            (law, _) => {
                let law = law.map_or("known".to_owned(), |l| spoken(l.name()));
                format!("exact: {law} law")
            }
        }
    } else {
        format!(
            "approximate: {}, {}",
            spoken(group.scheme.name()),
            orders(group)
        )
    };
    let through: Vec<String> = changed(model, plan, group)
        .map(|c| model.pool.format(c.forward))
        .collect();
    let becomes = group.becomes.map(|b| spoken(b.name()));
    match (through.as_slice(), becomes) {
        ([], Some(becomes)) if group.law.is_none_or(|l| spoken(l.name()) != becomes) => {
            line.push_str(&format!(" of {becomes}"));
        }
        ([], _) => {}
        ([one], Some(becomes)) => line.push_str(&format!("; {one} is {becomes}")),
        (several, Some(becomes)) => {
            line.push_str(&format!("; {} are {becomes}", several.join(", ")))
        }
        (coordinates, None) => line.push_str(&format!("; through {}", coordinates.join(", "))),
    }
    line
}

/// One row a group.
pub fn method_table(model: &Model, plan: &Plan) -> Table {
    let mut table = Table::new([("states", Align::Left), ("method", Align::Left)]);
    for group in &plan.groups {
        table.row([
            code(states(model, group)),
            words(method_line(model, plan, group)),
        ]);
    }
    table
}

/// The section on methods.
pub(super) fn methods(document: &mut Document, derivation: &Derivation<'_>) {
    let (model, plan) = (derivation.model, derivation.plan);
    document.section("Methods");
    for group in &plan.groups {
        let mut head = vec![
            Inline::Code(states(model, group)),
            Inline::Words(": ".into()),
        ];
        head.push(Inline::Words(method_line(model, plan, group)));
        document.part(head);
        document.equations(maps(plan, model, group));
        document.list(reasons(group));
        document.equations(trace::equations(&group.trace));
    }
    let sources: Vec<&str> = plan
        .noise
        .components
        .iter()
        .map(|c| c.source.as_str())
        .collect();
    if !sources.is_empty() {
        document.paragraph(words(format!(
            "Each step draws one standard normal number from each of: {}.",
            sources.join(", ")
        )));
    }
    let areas = areas(model, plan);
    if !areas.is_empty() {
        document.paragraph(words(format!(
            "It also draws, given the increments, the Levy areas of {}.",
            areas.join(", of ")
        )));
    }
}

/// The pairs of drivers whose Levy areas a step needs.
fn areas(model: &Model, plan: &Plan) -> Vec<String> {
    let steps = plan.groups.iter().flat_map(|group| match &group.method {
        Method::Step(steps) => &steps[..],
        _ => &[],
    });
    let pairs: BTreeSet<(usize, usize)> = steps
        .flat_map(|step| step.areas.iter().map(|&(j, k, _)| (j, k)))
        .collect();
    let name = |driver: usize| &model.drivers[driver].name;
    let named = |(j, k)| format!("{} and {}", name(j), name(k));
    pairs.into_iter().map(named).collect()
}

fn maps(plan: &Plan, model: &Model, group: &Group) -> Vec<Equation> {
    let mut lines = Vec::new();
    for coordinate in changed(model, plan, group) {
        let u = model.pool.symbol_name(coordinate.symbol).to_string();
        let state = model.states[coordinate.state].name.clone();
        let forward = vec![Term::Formula(coordinate.forward)];
        let inverse = vec![Term::Formula(coordinate.inverse)];
        let process = &coordinate.process;
        lines.push(
            Equation::new(vec![Term::Name(u.clone())], forward).remark("simulated coordinate"),
        );
        lines.push(Equation::new(vec![Term::Name(state)], inverse).remark("and back"));
        lines.push(
            super::dynamics::equation(model, &u, process.drift, &process.diffusion)
                .remark("its dynamics, by Ito's rule"),
        );
    }
    // A state that is stepped itself may be read as another value, kept in its domain.
    let read = group.states.iter().map(|&s| &plan.coordinates[s]);
    let projected = read.filter(|c| {
        let itself = model.pool.var(model.states[c.state].symbol);
        c.forward == itself && c.inverse != itself
    });
    for coordinate in projected {
        let state = vec![Term::Name(model.states[coordinate.state].name.clone())];
        let inverse = vec![Term::Formula(coordinate.inverse)];
        lines.push(Equation::new(state, inverse).remark("as it is read and observed"));
    }
    lines
}

fn reasons(group: &Group) -> Vec<super::document::Text> {
    let mut items: Vec<_> = group.reasons.iter().map(|r| prose(r)).collect();
    items.push(words(if group.preserves_domain {
        "Every step stays in the domain."
    } else {
        "A step can leave the domain; paths that do are counted and reported."
    }));
    for (scheme, why) in &group.rejected {
        let mut item = vec![Inline::Marked(
            Mark::Strong,
            format!("Not {}", spoken(scheme.name())),
        )];
        item.extend(prose(&format!(": {why}")));
        items.push(item);
    }
    items
}
