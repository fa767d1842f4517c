//! Systems of rows that read one another: one matrix exponential for all of them.

use super::Lowering;
use super::rows::{Row, covariance_rate};
use crate::program::op::{Op, ValueId};
use crate::scheme::LinearGaussian;
use crate::symbolic::Expr;

/// A linear Gaussian system put together row by row.
#[derive(Default)]
pub(super) struct System {
    /// (row, column, entry) of the drift matrix.
    a: Vec<(usize, usize, Expr)>,
    alpha: Vec<Option<Expr>>,
    c: Vec<Vec<Expr>>,
}

impl System {
    pub(super) fn len(&self) -> usize {
        self.c.len()
    }

    pub(super) fn single(&mut self, row: &Row) {
        let place = self.len();
        self.a.push((place, place, row.rate));
        self.alpha.push(None);
        self.c.push(row.coefficients.clone());
    }

    pub(super) fn group(&mut self, system: &LinearGaussian) {
        let offset = self.len();
        for (i, row) in system.a.iter().enumerate() {
            let entries = row.iter().enumerate();
            self.a
                .extend(entries.map(|(k, &entry)| (offset + i, offset + k, entry)));
            self.alpha.push(Some(system.alpha[i]));
            self.c.push(system.c[i].clone());
        }
    }

    pub(super) fn transition(&self, lowering: &mut Lowering<'_>) -> (ValueId, usize) {
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
