//! The Gaussian vector of a step: each component as a combination of independent standard normals.
//!
//! Components that are not correlated fall into blocks of their own. Within a block the covariance over
//! a step of length h is known: entry (i, k) is `q_ik int_0^h exp((a_i + a_k) s) ds` where the rows
//! decouple, else it comes from the matrix exponential. The normals are mixed by the covariance's lower
//! triangular factor.

use std::collections::BTreeMap;

use super::Lowering;
use crate::program::op::{Op, ValueId};
use crate::scheme::{Component, LinearGaussian, Method};
use crate::symbolic::{Expr, Function};

/// A combination of sources of normal draws: (source, coefficient), the coefficients the same on all
/// paths.
pub(super) type Mixture = Vec<(usize, ValueId)>;

/// The exact transition of a coupled group, out of a matrix operation.
#[derive(Clone, Copy)]
pub(super) struct Transition {
    pub(super) matrix: ValueId,
    pub(super) dim: usize,
    /// Where the group's first state stands in the matrix.
    pub(super) offset: usize,
}

/// The noise of a step.
#[derive(Default)]
pub(super) struct Noise {
    mixtures: Vec<Mixture>,
    /// Of the groups whose rows are coupled.
    pub(super) transitions: BTreeMap<usize, Transition>,
}

/// A component's row: its drivers' coefficients and its own rate of decay.
struct Row {
    component: Component,
    coefficients: Vec<Expr>,
    rate: Expr,
}

impl Noise {
    pub(super) fn new(lowering: &mut Lowering<'_>) -> Self {
        let rows = rows(lowering);
        let mut noise = Self {
            mixtures: vec![Vec::new(); rows.len()],
            ..Self::default()
        };
        for block in blocks(lowering, &rows) {
            noise.block(lowering, &rows, &block);
        }
        noise
    }

    /// The normals that make up a component.
    pub(super) fn mixture(&self, component: usize) -> &Mixture {
        &self.mixtures[component]
    }

    /// The normals that make up a weighted sum of components.
    pub(super) fn combine(
        &self,
        lowering: &mut Lowering<'_>,
        weights: &[(usize, ValueId)],
    ) -> Mixture {
        let mut sums: BTreeMap<usize, ValueId> = BTreeMap::new();
        for &(component, weight) in weights {
            for &(source, coefficient) in self.mixture(component) {
                let part = lowering.builder.mul(weight, coefficient);
                let total = sums
                    .get(&source)
                    .map_or(part, |&sum| lowering.builder.add(sum, part));
                sums.insert(source, total);
            }
        }
        sums.into_iter().collect()
    }

    fn block(&mut self, lowering: &mut Lowering<'_>, rows: &[Row], block: &[usize]) {
        let coupled = coupled_groups(lowering, rows, block);
        let covariance = if coupled.is_empty() {
            if self.decoupled_shortcut(lowering, rows, block) {
                return;
            }
            let pairs = block
                .iter()
                .flat_map(|&i| block.iter().map(move |&k| (i, k)));
            pairs
                .map(|(i, k)| decoupled_covariance(lowering, &rows[i], &rows[k]))
                .collect()
        } else {
            self.coupled_covariance(lowering, rows, block, &coupled)
        };
        let dim = block.len();
        if dim == 1 {
            let deviation = lowering.builder.sqrt(covariance[0]);
            self.mixtures[block[0]] = vec![(block[0], deviation)];
            return;
        }
        let factor = lowering.builder.cholesky(dim, covariance);
        self.triangular(lowering, block, factor, None);
    }

    /// A block without decay is the step's square root times a factor that does not depend on the step;
    /// a row with one driver alone needs no square root of its covariance.
    fn decoupled_shortcut(
        &mut self,
        lowering: &mut Lowering<'_>,
        rows: &[Row],
        block: &[usize],
    ) -> bool {
        let pool = lowering.model.pool.clone();
        if let [only] = *block {
            let row = &rows[only];
            let mut drivers = row
                .coefficients
                .iter()
                .filter(|&&c| !pool.is_zero_literal(c));
            let (Some(&coefficient), None) = (drivers.next(), drivers.next()) else {
                return false;
            };
            let variance = elapsed(lowering, pool.mul(pool.int(2), row.rate));
            let deviation = pool.mul(coefficient, pool.sqrt(variance));
            let value = lowering.in_step(deviation);
            self.mixtures[only] = vec![(only, value)];
            return true;
        }
        if !block.iter().all(|&i| pool.is_zero_literal(rows[i].rate)) {
            return false;
        }
        let mut rates = Vec::new();
        for &i in block {
            for &k in block {
                let rate = covariance_rate(lowering, &rows[i].coefficients, &rows[k].coefficients);
                rates.push(lowering.in_step(rate));
            }
        }
        let factor = lowering.builder.cholesky(block.len(), rates);
        let root = lowering.in_step(pool.sqrt(lowering.length()));
        self.triangular(lowering, block, factor, Some(root));
        true
    }

    fn triangular(
        &mut self,
        lowering: &mut Lowering<'_>,
        block: &[usize],
        factor: ValueId,
        scale: Option<ValueId>,
    ) {
        for (row, &component) in block.iter().enumerate() {
            for (column, &source) in block.iter().enumerate().take(row + 1) {
                let entry = lowering.builder.extract(factor, row * block.len() + column);
                let entry = scale.map_or(entry, |scale| lowering.builder.mul(entry, scale));
                self.mixtures[component].push((source, entry));
            }
        }
    }

    /// One matrix exponential for all rows of a block: raw increments first, then whole groups.
    fn coupled_covariance(
        &mut self,
        lowering: &mut Lowering<'_>,
        rows: &[Row],
        block: &[usize],
        coupled: &[usize],
    ) -> Vec<ValueId> {
        let mut system = System::default();
        let mut place = BTreeMap::new();
        for &i in block {
            match rows[i].component {
                Component::Convolution { group, .. } if coupled.contains(&group) => {}
                _ => {
                    place.insert(i, system.len());
                    system.single(&rows[i]);
                }
            }
        }
        for &group in coupled {
            let offset = system.len();
            system.group(linear(lowering, group).expect("a coupled group is linear"));
            for &i in block {
                if let Component::Convolution { group: of, state } = rows[i].component
                    && of == group
                {
                    place.insert(i, offset + position(lowering, group, state));
                }
            }
            self.transitions.insert(
                group,
                Transition {
                    matrix: ValueId(0),
                    dim: 0,
                    offset,
                },
            );
        }
        let (matrix, dim) = system.transition(lowering);
        for group in coupled {
            let transition = self.transitions.get_mut(group).expect("inserted above");
            (transition.matrix, transition.dim) = (matrix, dim);
        }
        let first = dim * dim + dim;
        let entries = block.iter().flat_map(|i| block.iter().map(move |k| (i, k)));
        entries
            .map(|(i, k)| {
                lowering
                    .builder
                    .extract(matrix, first + place[i] * dim + place[k])
            })
            .collect()
    }

    /// The transition of a coupled group that no driver reaches.
    pub(super) fn noise_free(lowering: &mut Lowering<'_>, system: &LinearGaussian) -> Transition {
        let mut rows = System::default();
        rows.group(system);
        let (matrix, dim) = rows.transition(lowering);
        Transition {
            matrix,
            dim,
            offset: 0,
        }
    }
}

/// A linear Gaussian system put together row by row.
#[derive(Default)]
struct System {
    /// (row, column, entry) of the drift matrix.
    a: Vec<(usize, usize, Expr)>,
    alpha: Vec<Option<Expr>>,
    c: Vec<Vec<Expr>>,
}

impl System {
    fn len(&self) -> usize {
        self.c.len()
    }

    fn single(&mut self, row: &Row) {
        let place = self.len();
        self.a.push((place, place, row.rate));
        self.alpha.push(None);
        self.c.push(row.coefficients.clone());
    }

    fn group(&mut self, system: &LinearGaussian) {
        let offset = self.len();
        for (i, row) in system.a.iter().enumerate() {
            let entries = row.iter().enumerate();
            self.a
                .extend(entries.map(|(k, &entry)| (offset + i, offset + k, entry)));
            self.alpha.push(Some(system.alpha[i]));
            self.c.push(system.c[i].clone());
        }
    }

    fn transition(&self, lowering: &mut Lowering<'_>) -> (ValueId, usize) {
        let dim = self.len();
        let zero = lowering.builder.number(0.0);
        let mut a = vec![zero; dim * dim];
        for &(i, k, entry) in &self.a {
            a[i * dim + k] = lowering.in_step(entry);
        }
        let alpha: Vec<ValueId> = self
            .alpha
            .iter()
            .map(|alpha| alpha.map_or(zero, |alpha| lowering.in_step(alpha)))
            .collect();
        let mut q = Vec::with_capacity(dim * dim);
        for i in 0..dim {
            for k in 0..dim {
                let rate = covariance_rate(lowering, &self.c[i], &self.c[k]);
                q.push(lowering.in_step(rate));
            }
        }
        let length = lowering.builder.length();
        let op = Op::Transition {
            dim,
            a: a.into(),
            alpha: alpha.into(),
            q: q.into(),
            length,
        };
        (lowering.builder.matrix(op), dim)
    }
}

fn rows(lowering: &Lowering<'_>) -> Vec<Row> {
    let pool = &lowering.model.pool;
    let row = |component| match component {
        Component::Increment { driver } => {
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

fn linear<'a>(lowering: &Lowering<'a>, group: usize) -> Option<&'a LinearGaussian> {
    match &lowering.plan.groups[group].method {
        Method::LinearGaussian(system) => Some(system),
        _ => None,
    }
}

fn position(lowering: &Lowering<'_>, group: usize, state: usize) -> usize {
    let states = &lowering.plan.groups[group].states;
    states
        .iter()
        .position(|&s| s == state)
        .expect("the state belongs to the group")
}

/// Whether a system's rows do not read one another.
pub(super) fn is_diagonal(lowering: &Lowering<'_>, system: &LinearGaussian) -> bool {
    let pool = &lowering.model.pool;
    let rows = system.a.iter().enumerate();
    rows.into_iter().all(|(i, row)| {
        row.iter()
            .enumerate()
            .all(|(k, &e)| i == k || pool.is_zero_literal(e))
    })
}

fn coupled_groups(lowering: &Lowering<'_>, rows: &[Row], block: &[usize]) -> Vec<usize> {
    let mut groups: Vec<usize> = block
        .iter()
        .filter_map(|&i| coupled_group(lowering, &rows[i]))
        .collect();
    groups.sort_unstable();
    groups.dedup();
    groups
}

fn coupled_group(lowering: &Lowering<'_>, row: &Row) -> Option<usize> {
    match row.component {
        Component::Convolution { group, .. } => linear(lowering, group)
            .filter(|system| !is_diagonal(lowering, system))
            .map(|_| group),
        Component::Increment { .. } => None,
    }
}

/// The components in blocks that are independent of one another, each in ascending order.
fn blocks(lowering: &Lowering<'_>, rows: &[Row]) -> Vec<Vec<usize>> {
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
fn covariance_rate(lowering: &Lowering<'_>, c: &[Expr], d: &[Expr]) -> Expr {
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

fn decoupled_covariance(lowering: &mut Lowering<'_>, first: &Row, second: &Row) -> ValueId {
    let rate = covariance_rate(lowering, &first.coefficients, &second.coefficients);
    let decay = lowering.model.pool.add(first.rate, second.rate);
    let covariance = lowering.model.pool.mul(rate, elapsed(lowering, decay));
    lowering.in_step(covariance)
}
