//! Systems of rows that read one another: one matrix exponential for all of them.

use super::Lowering;
use super::rows::{Coefficients, Row, coefficients, covariance_rate};
use crate::program::op::{Op, ValueId};
use crate::scheme::LinearGaussian;
use crate::symbolic::Expr;

/// A linear Gaussian system put together row by row.
#[derive(Default)]
pub(super) struct System {
    /// (row, column, entry) of the drift matrix.
    a: Vec<(usize, usize, Expr)>,
    alpha: Vec<Option<Expr>>,
    c: Vec<Coefficients>,
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

    pub(super) fn group(&mut self, lowering: &Lowering<'_>, system: &LinearGaussian) {
        let offset = self.len();
        for (i, row) in system.a.iter().enumerate() {
            let entries = row.iter().enumerate();
            self.a
                .extend(entries.map(|(k, &entry)| (offset + i, offset + k, entry)));
            self.alpha.push(Some(system.alpha[i]));
            self.c.push(coefficients(lowering, &system.c[i]));
        }
    }

    /// The law of a step as a matrix operation, and its dimension. Where a coefficient depends on time
    /// the coefficients are computed at every instant that the law asks for.
    pub(super) fn transition(&self, lowering: &mut Lowering<'_>) -> (ValueId, usize) {
        let dim = self.len();
        let rates = self.covariance_rates(lowering);
        let formulas = self.a.iter().map(|&(.., entry)| entry);
        let formulas = formulas
            .chain(self.alpha.iter().copied().flatten())
            .chain(rates.iter().copied());
        let moving = lowering.any_moves(formulas);
        let mut value = |formula: Expr| match moving {
            true => lowering.at_instant(formula),
            false => lowering.in_step(formula),
        };
        let mut entries: Vec<Option<ValueId>> = vec![None; dim * dim];
        for &(i, k, entry) in &self.a {
            entries[i * dim + k] = Some(value(entry));
        }
        let alpha: Vec<Option<ValueId>> = self
            .alpha
            .iter()
            .map(|alpha| alpha.map(&mut value))
            .collect();
        let q = rates.into_iter().map(&mut value).collect();
        let zero = lowering.builder.number(0.0);
        let or_zero =
            |values: Vec<Option<ValueId>>| values.into_iter().map(|v| v.unwrap_or(zero)).collect();
        let (a, alpha) = (or_zero(entries), or_zero(alpha));
        let (start, length) = (lowering.builder.start(), lowering.builder.length());
        let op = if moving {
            Op::MovingTransition {
                dim,
                a,
                alpha,
                q,
                start,
                length,
            }
        } else {
            Op::Transition {
                dim,
                a,
                alpha,
                q,
                length,
            }
        };
        (lowering.builder.matrix(op), dim)
    }

    /// `c R c'`, row by row.
    fn covariance_rates(&self, lowering: &Lowering<'_>) -> Vec<Expr> {
        let rows = self.c.iter();
        rows.flat_map(|c| self.c.iter().map(|d| covariance_rate(lowering, c, d)))
            .collect()
    }
}
