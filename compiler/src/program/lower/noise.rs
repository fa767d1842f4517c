//! The Gaussian vector of a step: each component as a combination of independent standard normals.
//!
//! Components that are not correlated fall into blocks of their own. Within a block the covariance over
//! a step of length h is known: entry (i, k) is `q_ik int_0^h exp((a_i + a_k) s) ds` where the rows
//! decouple, else it comes from the matrix exponential. The normals are mixed by the covariance's lower
//! triangular factor: entry by entry in a small block, by one operation in a large one, whose program
//! would be quadratic in its components otherwise.

use std::collections::BTreeMap;

use super::Lowering;
use super::rows::{
    Row, blocks, coupled_groups, covariance_rate, decoupled_covariance, elapsed, has_moving_law,
    linear, position, rows,
};
use super::system::System;
use crate::program::op::ValueId;
use crate::scheme::{Component, LinearGaussian};

/// A block with more components than this is mixed by one operation. Up to twenty, straight code is a few
/// percent faster.
const LARGEST_SPELLED_OUT: usize = 16;

/// A normal number on each path.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Normal {
    /// The draw of a source, by its index.
    Source(usize),
    /// The part of a component in a block that one operation mixes: component and value.
    Mixed(usize, ValueId),
}

/// A combination of normal numbers, the coefficients the same on all paths.
pub(super) type Mixture = Vec<(Normal, ValueId)>;

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
    /// The Levy areas of the pairs of drivers that need them.
    pub(super) areas: BTreeMap<(usize, usize), ValueId>,
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
        noise.areas = lowering.levy_areas(&noise);
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
        let mut sums: BTreeMap<Normal, ValueId> = BTreeMap::new();
        for &(component, weight) in weights {
            for &(normal, coefficient) in self.mixture(component) {
                let part = lowering.builder.mul(weight, coefficient);
                let total = sums
                    .get(&normal)
                    .map_or(part, |&sum| lowering.builder.add(sum, part));
                sums.insert(normal, total);
            }
        }
        sums.into_iter().collect()
    }

    fn block(&mut self, lowering: &mut Lowering<'_>, rows: &[Row], block: &[usize]) {
        let coupled = coupled_groups(lowering, rows, block);
        let covariance = if coupled.is_empty() && !has_moving_law(lowering, rows, block) {
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
            self.mixtures[block[0]] = vec![(Normal::Source(block[0]), deviation)];
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
            let [(_, coefficient)] = row.coefficients[..] else {
                return false;
            };
            let variance = elapsed(lowering, pool.mul(pool.int(2), row.rate));
            let deviation = pool.mul(coefficient, pool.sqrt(variance));
            let value = lowering.in_step(deviation);
            self.mixtures[only] = vec![(Normal::Source(only), value)];
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
        if block.len() > LARGEST_SPELLED_OUT {
            return self.mixed(lowering, block, factor, scale);
        }
        for (row, &component) in block.iter().enumerate() {
            for (column, &source) in block.iter().enumerate().take(row + 1) {
                let entry = lowering.builder.extract(factor, row * block.len() + column);
                let entry = scale.map_or(entry, |scale| lowering.builder.mul(entry, scale));
                self.mixtures[component].push((Normal::Source(source), entry));
            }
        }
    }

    /// One operation for all rows of a block; a component is its row, scaled.
    fn mixed(
        &mut self,
        lowering: &mut Lowering<'_>,
        block: &[usize],
        factor: ValueId,
        scale: Option<ValueId>,
    ) {
        let builder = &mut lowering.builder;
        builder.hint(factor, "factor");
        let rows = builder.correlate(factor, block);
        builder.hint(rows, "correlated");
        let scale = scale.unwrap_or_else(|| builder.number(1.0));
        for (row, &component) in block.iter().enumerate() {
            let value = builder.extract(rows, row);
            let source = &lowering.plan.noise.components[component].source;
            builder.hint(value, format!("correlated_{source}"));
            self.mixtures[component] = vec![(Normal::Mixed(component, value), scale)];
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
            system.group(
                lowering,
                linear(lowering, group).expect("a coupled group is linear"),
            );
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
        rows.group(lowering, system);
        let (matrix, dim) = rows.transition(lowering);
        Transition {
            matrix,
            dim,
            offset: 0,
        }
    }
}
