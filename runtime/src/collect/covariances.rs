//! Sample covariances of pairs of quantities, with their standard errors.

use std::io;

use super::summary::halving_sum;
use super::tree::{Merge, Tree};
use super::{BlockSpan, Collector, Layout};
use crate::lane::{LANES, Lane};

/// Central sums of a sample of pairs `(x, y)`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CoMoments {
    /// How many pairs.
    pub count: u64,
    /// The means of `x` and `y`.
    pub means: [f64; 2],
    /// Sums of `u^2`, `u v`, `v^2` with `u`, `v` the differences from the means.
    pub second: [f64; 3],
    /// Sums of `u^2 v` and `u v^2`.
    pub third: [f64; 2],
    /// The sum of `u^2 v^2`.
    pub fourth: f64,
}

impl CoMoments {
    /// The covariance, with divisor `n - 1`.
    #[must_use]
    pub fn covariance(&self) -> f64 {
        self.second[1] / (self.count as f64 - 1.0)
    }

    /// The correlation.
    #[must_use]
    pub fn correlation(&self) -> f64 {
        let [xx, xy, yy] = self.second;
        xy / (xx.sqrt() * yy.sqrt())
    }

    /// The standard error of [`CoMoments::covariance`] to leading order,
    /// `sqrt((E[u^2 v^2] - E[u v]^2) / n)`.
    #[must_use]
    pub fn std_error(&self) -> f64 {
        let n = self.count as f64;
        let product = self.second[1] / n;
        ((self.fourth / n - product * product) / n).sqrt()
    }

    /// Adds the pairs of another sample, by the binomial formula in both variables
    /// (P. Pebay, Sandia report SAND2008-6212).
    pub fn merge(&mut self, other: &CoMoments) {
        if other.count == 0 {
            return;
        }
        if self.count == 0 {
            *self = *other;
            return;
        }
        let (a, b) = (self.count as f64, other.count as f64);
        let gaps = [0, 1].map(|i| other.means[i] - self.means[i]);
        let left = self.shifted(gaps.map(|gap| -gap * (b / (a + b))));
        let right = other.shifted(gaps.map(|gap| gap * (a / (a + b))));
        self.count += other.count;
        for (mean, gap) in self.means.iter_mut().zip(gaps) {
            *mean += gap * (b / (a + b));
        }
        self.second = [0, 1, 2].map(|i| left.0[i] + right.0[i]);
        self.third = [0, 1].map(|i| left.1[i] + right.1[i]);
        self.fourth = left.2 + right.2;
    }

    /// The central sums about a point `(d, e)` below the means.
    fn shifted(&self, [d, e]: [f64; 2]) -> ([f64; 3], [f64; 2], f64) {
        let n = self.count as f64;
        let [xx, xy, yy] = self.second;
        let [xxy, xyy] = self.third;
        let second = [xx + n * d * d, xy + n * d * e, yy + n * e * e];
        let third = [
            xxy + 2.0 * d * xy + e * xx + n * d * d * e,
            xyy + 2.0 * e * xy + d * yy + n * d * e * e,
        ];
        let fourth = self.fourth
            + 2.0 * (e * xxy + d * xyy)
            + (e * e * xx + 4.0 * d * e * xy + d * d * yy)
            + n * (d * d) * (e * e);
        (second, third, fourth)
    }

    /// The sums over some lanes of a block.
    #[inline(always)]
    fn of_lanes(x: &Lane, y: &Lane, live: std::ops::Range<usize>) -> CoMoments {
        let count = live.len() as f64;
        let mut mask = Lane::ZERO;
        mask[live.clone()].fill(1.0);
        let mean = |lane: &Lane| {
            let mut kept = *lane;
            kept[..live.start].fill(0.0);
            kept[live.end..].fill(0.0);
            halving_sum(kept) / count
        };
        let means = [mean(x), mean(y)];
        let mut sums = [Lane::ZERO; 6];
        for i in 0..LANES {
            let u = if mask[i] == 0.0 { 0.0 } else { x[i] - means[0] };
            let v = if mask[i] == 0.0 { 0.0 } else { y[i] - means[1] };
            let product = u * v;
            sums[0][i] = u * u;
            sums[1][i] = product;
            sums[2][i] = v * v;
            sums[3][i] = u * product;
            sums[4][i] = v * product;
            sums[5][i] = product * product;
        }
        let [xx, xy, yy, xxy, xyy, xxyy] = sums.map(halving_sum);
        CoMoments {
            count: live.len() as u64,
            means,
            second: [xx, xy, yy],
            third: [xxy, xyy],
            fourth: xxyy,
        }
    }
}

/// Collects [`CoMoments`] of pairs of quantities, given by their indices, at each time.
#[derive(Clone, Debug, Default)]
pub struct Covariances {
    pairs: Vec<(usize, usize)>,
}

impl Covariances {
    /// Collects these pairs of indices of quantities.
    #[must_use]
    pub fn new(pairs: Vec<(usize, usize)>) -> Covariances {
        Covariances { pairs }
    }
}

/// The sums of a block.
#[derive(Debug)]
pub struct CovariancesBlock {
    span: BlockSpan,
    cells: Vec<CoMoments>,
}

/// The sums of all blocks so far.
#[derive(Debug)]
pub struct CovariancesTotal(Tree<CoMoments>);

impl Merge for CoMoments {
    fn merge(&mut self, other: &CoMoments) {
        CoMoments::merge(self, other);
    }
}

impl Collector for Covariances {
    type Block = CovariancesBlock;
    type Total = CovariancesTotal;
    /// One row a time, with one entry a pair.
    type Output = Vec<Vec<CoMoments>>;

    fn total(&self, _layout: &Layout) -> CovariancesTotal {
        CovariancesTotal(Tree::new())
    }

    fn block(&self, layout: &Layout, span: &BlockSpan) -> CovariancesBlock {
        CovariancesBlock {
            span: span.clone(),
            cells: Vec::with_capacity(layout.times * self.pairs.len()),
        }
    }

    #[inline(always)]
    fn observe(&self, block: &mut CovariancesBlock, _time: usize, outputs: &[Lane]) {
        for &(x, y) in &self.pairs {
            let live = block.span.lanes.clone();
            let sums = CoMoments::of_lanes(&outputs[x], &outputs[y], live);
            block.cells.push(sums);
        }
    }

    fn accept(&self, total: &mut CovariancesTotal, block: CovariancesBlock) -> io::Result<()> {
        total.0.push(block.span.block, block.cells);
        Ok(())
    }

    fn finish(self, total: CovariancesTotal) -> Vec<Vec<CoMoments>> {
        let cells = total.0.finish();
        let rows = cells.chunks(self.pairs.len().max(1));
        rows.map(<[CoMoments]>::to_vec).collect()
    }
}
