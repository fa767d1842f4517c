//! The rows behind the components of a step's noise, and which of them belong together.

use std::collections::BTreeMap;

use super::Lowering;
use crate::program::op::ValueId;
use crate::scheme::{Component, LinearGaussian, Method};
use crate::symbolic::{Expr, Function};

/// The coefficients of the drivers that are not zero: (driver, coefficient).
pub(super) type Coefficients = Vec<(usize, Expr)>;

/// A component's row: its drivers' coefficients and its own rate of decay.
pub(super) struct Row {
    pub(super) component: Component,
    pub(super) coefficients: Coefficients,
    pub(super) rate: Expr,
}

/// The coefficients of a row that are not zero.
pub(super) fn coefficients(lowering: &Lowering<'_>, row: &[Expr]) -> Coefficients {
    let all = row.iter().copied().enumerate();
    all.filter(|&(_, c)| !lowering.model.pool.is_zero_literal(c))
        .collect()
}

pub(super) fn rows(lowering: &Lowering<'_>) -> Vec<Row> {
    let pool = &lowering.model.pool;
    let row = |component| match component {
        Component::Increment { driver } | Component::Companion { driver } => Row {
            component,
            coefficients: vec![(driver, pool.one())],
            rate: pool.zero(),
        },
        Component::Convolution { group, state } => {
            let system = linear(lowering, group).expect("a convolution belongs to an exact group");
            let i = position(lowering, group, state);
            Row {
                component,
                coefficients: coefficients(lowering, &system.c[i]),
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
    let reaches: Vec<Reach> = rows.iter().map(|row| Reach::new(lowering, row)).collect();
    for i in 0..rows.len() {
        for k in 0..i {
            if block_of[i] != block_of[k] && reaches[i].meets(&reaches[k], lowering) {
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

/// What decides whether two rows belong together.
struct Reach {
    companion: bool,
    group: Option<usize>,
    /// The row, or all rows of a coupled group: a coupled row may carry drivers of any of them.
    rows: Vec<Coefficients>,
}

impl Reach {
    fn new(lowering: &Lowering<'_>, row: &Row) -> Self {
        let group = coupled_group(lowering, row);
        let rows = match group.and_then(|g| linear(lowering, g)) {
            Some(system) => {
                let rows = system.c.iter();
                rows.map(|c| coefficients(lowering, c)).collect()
            }
            None => vec![row.coefficients.clone()],
        };
        Self {
            companion: matches!(row.component, Component::Companion { .. }),
            group,
            rows,
        }
    }

    fn meets(&self, other: &Self, lowering: &Lowering<'_>) -> bool {
        if self.companion != other.companion {
            return false;
        }
        if self.group.is_some() && self.group == other.group {
            return true;
        }
        let together = |c: &Coefficients, d: &Coefficients| {
            let rate = covariance_rate(lowering, c, d);
            !lowering.model.pool.is_zero_literal(rate)
        };
        let mut pairs = self
            .rows
            .iter()
            .flat_map(|c| other.rows.iter().map(move |d| (c, d)));
        pairs.any(|(c, d)| together(c, d))
    }
}

/// `c R d'`.
pub(super) fn covariance_rate(lowering: &Lowering<'_>, c: &Coefficients, d: &Coefficients) -> Expr {
    let pool = &lowering.model.pool;
    let correlation = &lowering.model.correlation;
    let mut terms = Vec::new();
    for &(j, left) in c {
        for &(k, right) in d {
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
