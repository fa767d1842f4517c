//! Which states follow a linear Gaussian system, in coordinates of their own.
//!
//! With `u_i = F_i(x_i, t)` by Ito's rule `du_i = mu_i dt + sum_j c_ij dW_j`. The states whose `c_ij`
//! are free of the states and whose `mu_i` are `sum_j A_ij u_j + alpha_i` with `A`, `alpha` free of them
//! have a Gaussian transition that can be drawn exactly (Karatzas and Shreve 1991, section 5.6; the
//! coefficients may depend on time). `A_ij` is read off as `(d mu_i/dx_j)/F_j'(x_j)`; that it and the
//! rest are free of the states is proved by algebra, never guessed, and the finished row is compared
//! once more, by normal form and by numbers.
//!
//! The largest set of such states is found by elimination: a state that fails takes with it those
//! whose drift needs it, and only those.

mod eliminate;
mod row;

use std::collections::BTreeMap;

use super::coordinate::Candidate;
use super::end_rules::acting;
use crate::calculus::{Dynamics, Process};
use crate::model::Model;
use crate::symbolic::Expr;
use crate::symbolic::trace::Trace;
use eliminate::Finder;

/// A state whose coordinate is a row of a linear Gaussian system.
#[derive(Clone, Debug)]
pub struct Row {
    /// Its coordinate.
    pub coordinate: Candidate,
    /// Drift and diffusion of the coordinate, in the states.
    pub process: Process,
    /// The non-zero entries of its row of `A`, by state.
    pub slopes: BTreeMap<usize, Expr>,
    /// The part of its drift that is free of the states.
    pub constant: Expr,
    /// The coefficients of the drivers, free of the states.
    pub noise: Vec<Expr>,
    /// The drivers whose coefficient is not zero.
    pub drivers: Vec<usize>,
    /// Ito's rule on the coordinate, step by step.
    pub trace: Trace,
}

/// For each state its row, or why it has none.
pub type Rows = Vec<Result<Row, String>>;

/// Finds the largest linear Gaussian system among the states.
///
/// `excluded` names states that must not take part, with the reason, such as an author's override.
pub fn find(model: &Model, dynamics: &Dynamics, excluded: &BTreeMap<usize, String>) -> Rows {
    let mut finder = Finder::new(model, dynamics, excluded);
    loop {
        let rows = finder.settle();
        let found = confined(model, &rows).or_else(|| stopped(model, dynamics, &rows));
        match found {
            Some((state, reason)) => finder.exclude(state, reason),
            None => return rows,
        }
    }
}

/// Connected components of the states with rows: through `A` and through drivers that are shared or
/// correlated. Ascending, each ascending.
pub fn components(model: &Model, rows: &Rows) -> Vec<Vec<usize>> {
    let members: Vec<(usize, &Row)> = rows
        .iter()
        .enumerate()
        .filter_map(|(i, r)| Some((i, r.as_ref().ok()?)))
        .collect();
    let mut label: Vec<usize> = (0..rows.len()).collect();
    for &(i, left) in &members {
        for &(j, right) in &members {
            let joined = left.slopes.contains_key(&j) || noises_meet(model, left, right);
            if joined && label[i] != label[j] {
                let (keep, drop) = (label[i].min(label[j]), label[i].max(label[j]));
                label
                    .iter_mut()
                    .filter(|l| **l == drop)
                    .for_each(|l| *l = keep);
            }
        }
    }
    let mut found: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
    for (i, _) in members {
        found.entry(label[i]).or_default().push(i);
    }
    found.into_values().collect()
}

fn noises_meet(model: &Model, left: &Row, right: &Row) -> bool {
    pairs(model, left, right).any(|rho| !model.pool.is_zero_literal(rho))
}

/// The correlations of the drivers of one row with those of another.
fn pairs<'a>(model: &'a Model, left: &'a Row, right: &'a Row) -> impl Iterator<Item = Expr> + 'a {
    let correlations =
        move |&j: &usize| right.drivers.iter().map(move |&k| model.correlation[j][k]);
    left.drivers.iter().flat_map(correlations)
}

/// Which rows noise reaches, directly or through the drift.
pub fn reached(rows: &Rows) -> Vec<bool> {
    let noisy = |row: &Row| !row.drivers.is_empty();
    let mut reached: Vec<bool> = rows
        .iter()
        .map(|row| row.as_ref().is_ok_and(noisy))
        .collect();
    loop {
        let before = reached.clone();
        for (i, row) in rows.iter().enumerate() {
            if let Ok(row) = row {
                reached[i] |= row.slopes.keys().any(|&j| before[j]);
            }
        }
        if reached == before {
            return reached;
        }
    }
}

/// A state with a Gaussian coordinate that its domain cannot hold.
fn confined(model: &Model, rows: &Rows) -> Option<(usize, String)> {
    let reached = reached(rows);
    let (state, row) = rows.iter().enumerate().find_map(|(i, row)| {
        let row = row.as_ref().ok()?;
        (reached[i] && !row.coordinate.onto_line).then_some((i, row))
    })?;
    let shown = model.pool.format(row.coordinate.forward);
    Some((
        state,
        format!(
            "{shown} would be Gaussian, and a Gaussian variable leaves the domain of {}: the closed form \
         holds only until the first exit",
            model.states[state].name
        ),
    ))
}

/// A state without noise whose closed end has a rule that may act: the solution of the equation is its
/// path only until then.
fn stopped(model: &Model, dynamics: &Dynamics, rows: &Rows) -> Option<(usize, String)> {
    let reached = reached(rows);
    rows.iter().enumerate().find_map(|(i, row)| {
        let row = row.as_ref().ok()?;
        if reached[i] || row.coordinate.onto_line {
            return None;
        }
        let rule = acting(model, dynamics, i)?;
        let (name, end) = (&model.states[i].name, model.pool.format(rule.end));
        let what = if rule.absorbs { "absorbs" } else { "reflects" };
        Some((
            i,
            format!(
                "the end {end} of the domain of {name} {what}, and {name} may come to it: the solution of the \
                 equation holds only until then"
            ),
        ))
    })
}
