//! The rows behind the components of a step's noise, and which of them belong together.

use std::collections::BTreeMap;

use super::Lowering;
use crate::program::op::ValueId;
use crate::scheme::{Component, LinearGaussian, Method};
use crate::symbolic::{Expr, Function};

/// A component's row: its drivers' coefficients and its own rate of decay.
pub(super) struct Row {
    pub(super) component: Component,
    pub(super) coefficients: Vec<Expr>,
    pub(super) rate: Expr,
}
pub(super) fn rows(lowering: &Lowering<'_>) -> Vec<Row> {
    let pool = &lowering.model.pool;
    let row = |component| match component {
        Component::Increment { driver } | Component::Companion { driver } => {
            let unit = |j| if j == driver { pool.one() } else { pool.zero() };
            let coefficients = (0..lowering.model.drivers.len()).map(unit).collect();
            Row {
                component,
                coefficients,
                rate: pool.zero(),
            }
        }
        Component::Convolution { group, state } => {
            let system = linear(lowering, group).expect("a convolution belongs to an exact group");
            let i = position(lowering, group, state);
            Row {
                component,
                coefficients: system.c[i].clone(),
                rate: system.a[i][i],
            }
        }
    };
    lowering
        .plan
        .noise
        .components
        .iter()
        .map(|c| row(c.component))
        .collect()
}

pub(super) fn linear<'a>(lowering: &Lowering<'a>, group: usize) -> Option<&'a LinearGaussian> {
    match &lowering.plan.groups[group].method {
        Method::LinearGaussian(system) => Some(system),
        _ => None,
    }
}

pub(super) fn position(lowering: &Lowering<'_>, group: usize, state: usize) -> usize {
    let states = &lowering.plan.groups[group].states;
    states
        .iter()
        .position(|&s| s == state)
        .expect("the state belongs to the group")
}

impl Lowering<'_> {
    /// Whether one of these formulas depends on time.
    pub(super) fn any_moves(&self, formulas: impl IntoIterator<Item = Expr>) -> bool {
        let depends = |e| self.model.pool.depends_on(e, self.model.time);
        formulas.into_iter().any(depends)
    }
}

/// Whether a system's rows do not read one another and stand still: their laws are formulas.
pub(super) fn is_decoupled(lowering: &Lowering<'_>, system: &LinearGaussian) -> bool {
    let pool = &lowering.model.pool;
    let rows = system.a.iter().enumerate();
    !system.moving
        && rows.into_iter().all(|(i, row)| {
            row.iter()
                .enumerate()
                .all(|(k, &e)| i == k || pool.is_zero_literal(e))
        })
}

pub(super) fn coupled_groups(lowering: &Lowering<'_>, rows: &[Row], block: &[usize]) -> Vec<usize> {
    let mut groups: Vec<usize> = block
        .iter()
        .filter_map(|&i| coupled_group(lowering, &rows[i]))
        .collect();
    groups.sort_unstable();
    groups.dedup();
    groups
}

/// Whether an exact law shares the block with drivers whose correlation to it depends on time.
pub(super) fn has_moving_law(lowering: &Lowering<'_>, rows: &[Row], block: &[usize]) -> bool {
    let law = |&i: &usize| matches!(rows[i].component, Component::Convolution { .. });
    let moves = |i: usize, k: usize| {
        let (c, d) = (&rows[i].coefficients, &rows[k].coefficients);
        lowering.any_moves([covariance_rate(lowering, c, d)])
    };
    block.iter().any(law) && block.iter().any(|&i| block.iter().any(|&k| moves(i, k)))
}

fn coupled_group(lowering: &Lowering<'_>, row: &Row) -> Option<usize> {
    match row.component {
        Component::Convolution { group, .. } => linear(lowering, group)
            .filter(|system| !is_decoupled(lowering, system))
            .map(|_| group),
        Component::Increment { .. } | Component::Companion { .. } => None,
    }
}

/// The components in blocks that are independent of one another, each in ascending order.
pub(super) fn blocks(lowering: &Lowering<'_>, rows: &[Row]) -> Vec<Vec<usize>> {
    let mut block_of: Vec<usize> = (0..rows.len()).collect();
    for i in 0..rows.len() {
        for k in 0..i {
            if linked(lowering, &rows[i], &rows[k]) && block_of[i] != block_of[k] {
                let (from, to) = (block_of[i].max(block_of[k]), block_of[i].min(block_of[k]));
                block_of
                    .iter_mut()
                    .filter(|b| **b == from)
                    .for_each(|b| *b = to);
            }
        }
    }
    let mut blocks: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
    for (component, block) in block_of.into_iter().enumerate() {
        blocks.entry(block).or_default().push(component);
    }
    blocks.into_values().collect()
}

fn linked(lowering: &Lowering<'_>, first: &Row, second: &Row) -> bool {
    let companion = |row: &Row| matches!(row.component, Component::Companion { .. });
    if companion(first) != companion(second) {
        return false;
    }
    let group = coupled_group(lowering, first);
    if group.is_some() && group == coupled_group(lowering, second) {
        return true;
    }
    // A coupled row may carry drivers of any row of its group.
    let reach = |row: &Row| match coupled_group(lowering, row).and_then(|g| linear(lowering, g)) {
        Some(system) => system.c.clone(),
        None => vec![row.coefficients.clone()],
    };
    let (first, second) = (reach(first), reach(second));
    first.iter().any(|c| {
        second.iter().any(|d| {
            !lowering
                .model
                .pool
                .is_zero_literal(covariance_rate(lowering, c, d))
        })
    })
}

/// `c R d'`.
pub(super) fn covariance_rate(lowering: &Lowering<'_>, c: &[Expr], d: &[Expr]) -> Expr {
    let pool = &lowering.model.pool;
    let correlation = &lowering.model.correlation;
    let mut terms = Vec::new();
    for (j, &left) in c
        .iter()
        .enumerate()
        .filter(|(_, e)| !pool.is_zero_literal(**e))
    {
        for (k, &right) in d
            .iter()
            .enumerate()
            .filter(|(_, e)| !pool.is_zero_literal(**e))
        {
            terms.push(pool.product([left, correlation[j][k], right]));
        }
    }
    pool.sum(terms)
}

/// `int_0^h exp(rate s) ds`.
pub(super) fn elapsed(lowering: &Lowering<'_>, rate: Expr) -> Expr {
    let pool = &lowering.model.pool;
    let length = lowering.length();
    if pool.is_zero_literal(rate) {
        return length;
    }
    pool.mul(
        length,
        pool.call(Function::Expm1Ratio, &[pool.mul(rate, length)]),
    )
}

pub(super) fn decoupled_covariance(
    lowering: &mut Lowering<'_>,
    first: &Row,
    second: &Row,
) -> ValueId {
    let rate = covariance_rate(lowering, &first.coefficients, &second.coefficients);
    let decay = lowering.model.pool.add(first.rate, second.rate);
    let covariance = lowering.model.pool.mul(rate, elapsed(lowering, decay));
    lowering.in_step(covariance)
}
