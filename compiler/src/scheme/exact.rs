//! Groups stepped by their exact Gaussian transition.

use super::{Becomes, Group, Kind, Law, LinearGaussian, Method, RowNoise, SchemeName};
use super::{edges, normal_law};
use crate::analysis::free::{Freedom, free_of};
use crate::analysis::linear::{Row, Rows, components, reached};
use crate::calculus::{Dynamics, bracket};
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Bound, Expr};

/// One group for each connected component of the states that have a row.
pub(super) fn groups(model: &Model, dynamics: &Dynamics, rows: &Rows) -> Vec<Group> {
    let reached = reached(rows);
    components(model, rows)
        .into_iter()
        .map(|states| group(model, dynamics, rows, &reached, states))
        .collect()
}

fn group(
    model: &Model,
    dynamics: &Dynamics,
    rows: &Rows,
    reached: &[bool],
    states: Vec<usize>,
) -> Group {
    let members: Vec<(usize, &Row)> = states
        .iter()
        .filter_map(|&i| Some((i, rows[i].as_ref().ok()?)))
        .collect();
    let random = states.iter().any(|&i| reached[i]);
    let system = system(model, &members, reached);
    let (law, becomes) = if random {
        (law(model, &members), becomes(&members))
    } else {
        (Law::Deterministic, Becomes::Deterministic)
    };
    let mut trace = Trace::default();
    for &(i, row) in &members {
        trace.steps.extend(row.trace.steps.iter().cloned());
        trace.push(
            "linear form",
            format!(
                "drift of the coordinate of {} as a linear function of the coordinates",
                model.states[i].name
            ),
            Some(row.process.drift),
            linear_form(model, rows, row),
        );
    }
    if let (&[(state, row)], true, false) = (&members[..], random, system.moving) {
        for (note, formula) in normal_law::transition(model, state, row) {
            trace.push("transition law", note, None, formula);
        }
    }
    let mut reasons = reasons(model, rows, &members, law, system.moving);
    let confined = members.iter().filter(|(_, row)| !row.coordinate.onto_line);
    let open: Vec<String> = confined
        .flat_map(|&(i, _)| edges::unguarded(model, dynamics, i))
        .collect();
    let preserves_domain = open.is_empty();
    reasons.extend(open);
    Group {
        states,
        kind: Kind::Exact,
        law: Some(law),
        becomes: Some(becomes),
        scheme: SchemeName::Exact,
        strong_order: None,
        weak_order: None,
        preserves_domain,
        reasons,
        rejected: vec![(
            SchemeName::Milstein,
            "a discretisation has an error that the exact law does not have".to_owned(),
        )],
        trace,
        method: Method::LinearGaussian(system),
    }
}

fn system(model: &Model, members: &[(usize, &Row)], reached: &[bool]) -> LinearGaussian {
    let pool = &model.pool;
    let entry = |row: &Row, j: usize| row.slopes.get(&j).copied().unwrap_or_else(|| pool.zero());
    let moving = is_moving(model, members);
    let noise = |i: usize, row: &Row| match (reached[i], row.slopes.is_empty() && !moving) {
        (false, _) => RowNoise::None,
        (true, true) => RowNoise::Increments,
        (true, false) => RowNoise::Convolution,
    };
    LinearGaussian {
        a: members
            .iter()
            .map(|&(_, row)| members.iter().map(|&(j, _)| entry(row, j)).collect())
            .collect(),
        alpha: members.iter().map(|&(_, row)| row.constant).collect(),
        c: members.iter().map(|&(_, row)| row.noise.clone()).collect(),
        noise: members.iter().map(|&(i, row)| noise(i, row)).collect(),
        moving,
    }
}

/// Whether a coefficient of a system, or a correlation of its rows' noises, depends on time.
fn is_moving(model: &Model, members: &[(usize, &Row)]) -> bool {
    let rows = || members.iter().map(|&(_, row)| row);
    let rates =
        rows().flat_map(|left| rows().map(move |right| bracket(model, &left.noise, &right.noise)));
    let drifts = rows().flat_map(|row| row.slopes.values().copied().chain([row.constant]));
    let noises = rows().flat_map(|row| row.noise.iter().copied());
    drifts
        .chain(noises)
        .chain(rates)
        .any(|e| model.pool.depends_on(e, model.time))
}

/// The law of the states themselves, given that their coordinates are Gaussian.
fn law(model: &Model, members: &[(usize, &Row)]) -> Law {
    let affine = members.iter().all(|&(i, row)| {
        row.coordinate
            .is_affine(&model.pool, model.states[i].symbol)
    });
    match members {
        [_] if affine => Law::Normal,
        [(i, row)] if is_log(model, *i, row) => Law::Lognormal,
        _ if affine => Law::JointNormal,
        _ => Law::TransformedNormal,
    }
}

fn becomes(members: &[(usize, &Row)]) -> Becomes {
    match members {
        [(_, row)] if row.slopes.is_empty() => Becomes::ArithmeticBrownianMotion,
        [_] => Becomes::OrnsteinUhlenbeck,
        _ => Becomes::LinearGaussianSystem,
    }
}

/// Whether the coordinate is an affine function of log(x) on the positive half line.
fn is_log(model: &Model, state: usize, row: &Row) -> bool {
    let (pool, declared) = (&model.pool, &model.states[state]);
    let x = declared.symbol;
    let scaled = pool.mul(pool.var(x), pool.derivative(row.coordinate.forward, x));
    let positive = match declared.domain.lower {
        Bound::Open(end) | Bound::Closed(end) => pool.is_zero(end).is_yes(),
        Bound::Infinite => false,
    };
    positive && matches!(free_of(pool, scaled, &[x]), Freedom::Free(_))
}

/// `sum_j A_ij F_j(x_j) + alpha_i`.
fn linear_form(model: &Model, rows: &Rows, row: &Row) -> Expr {
    let pool = &model.pool;
    let terms = row.slopes.iter().filter_map(|(&j, &slope)| {
        Some(pool.mul(slope, rows[j].as_ref().ok()?.coordinate.forward))
    });
    pool.sum(terms.chain([row.constant]).collect::<Vec<_>>())
}

fn reasons(
    model: &Model,
    rows: &Rows,
    members: &[(usize, &Row)],
    law: Law,
    moving: bool,
) -> Vec<String> {
    let mut reasons: Vec<String> = members
        .iter()
        .map(|&(_, row)| equation(model, rows, row))
        .collect();
    let closing = match (members.len(), law) {
        (1, Law::Deterministic) if moving => {
            "This is a linear equation without noise whose coefficients depend on time alone: each step is its \
             solution, integrated to rounding accuracy."
        }
        (_, Law::Deterministic) if moving => {
            "These are linear equations without noise whose coefficients depend on time alone: each step is their \
             solution, integrated to rounding accuracy."
        }
        (1, Law::Deterministic) => {
            "This is a linear equation with constant coefficients and no noise: each step is its exact solution."
        }
        (_, Law::Deterministic) => {
            "These are linear equations with constant coefficients and no noise: each step is their exact solution."
        }
        (1, _) if moving => {
            "Its drift is linear, and its coefficients and its noise depend on time alone, so that each step is drawn \
             from the normal law of the transition, whose mean and variance are integrated over the step to \
             rounding accuracy: there is no discretisation error."
        }
        (_, _) if moving => {
            "The drift is linear, and coefficients, noise and correlations depend on time alone, so that each step is \
             one draw from the joint normal law of the transition, whose means and covariances are integrated over \
             the step to rounding accuracy: there is no discretisation error."
        }
        (1, _) => {
            "Its drift is linear with constant coefficients and its noise is constant, so that each step is \
             drawn from the normal law of the transition: there is no discretisation error."
        }
        _ => {
            "The drift is linear with constant coefficients and the noise is constant, so that each step is one \
             draw from the joint normal law of the transition: there is no discretisation error."
        }
    };
    reasons.push(closing.to_owned());
    reasons
}

/// `Ito's rule gives d log(S) = (mu - sigma^2/2) dt + sigma dW.`
fn equation(model: &Model, rows: &Rows, row: &Row) -> String {
    let pool = &model.pool;
    let factor = |e: Expr| {
        let text = pool.format(e);
        if text.contains([' ', '/']) || text.starts_with('-') {
            format!("({text})")
        } else {
            text
        }
    };
    let drift = linear_form(model, rows, row);
    let mut terms = Vec::new();
    if !pool.is_zero_literal(drift) {
        terms.push(format!("{} dt", factor(drift)));
    }
    for (driver, &c) in model.drivers.iter().zip(&row.noise) {
        if pool.is_one_literal(c) {
            terms.push(format!("d{}", driver.name));
        } else if !pool.is_zero_literal(c) {
            terms.push(format!("{} d{}", factor(c), driver.name));
        }
    }
    if terms.is_empty() {
        terms.push("0".to_owned());
    }
    let forward = pool.format(row.coordinate.forward);
    let left = if row.coordinate.is_identity() {
        format!("d{forward}")
    } else {
        format!("d({forward})")
    };
    format!("Ito's rule gives {left} = {}.", terms.join(" + "))
}
