//! Power sums about given centres: unbiased sample moments with standard errors of their own, and so a
//! check of the runtime's statistics from outside.

use std::io;

use driftwright_runtime::collect::{BlockSpan, Collector, Layout};
use driftwright_runtime::{Grid, LANES, Lane, Run, Simulator, simulate};

use super::checks::Check;
use super::laws::Moments;

/// The highest power summed: the third central moment's variance needs the sixth.
const POWERS: usize = 6;

/// Collects sums of the powers of `x - centre`, one centre per time and quantity.
#[derive(Clone, Debug)]
pub struct PowerSums {
    /// Centres, quantities within times.
    pub centres: Vec<f64>,
}

/// The mean powers of one quantity at one time.
#[derive(Clone, Copy, Debug, Default)]
pub struct MeanPowers {
    /// The centre.
    pub centre: f64,
    /// How many values.
    pub count: f64,
    /// Means of the powers 1 to 6 of the distance from the centre.
    pub means: [f64; POWERS],
}

/// One block's sums.
pub struct BlockSums {
    lanes: std::ops::Range<usize>,
    quantities: usize,
    sums: Vec<[f64; POWERS]>,
}

impl Collector for PowerSums {
    type Block = BlockSums;
    type Total = (f64, Vec<[f64; POWERS]>);
    type Output = Vec<MeanPowers>;

    fn total(&self, layout: &Layout) -> Self::Total {
        (0.0, vec![[0.0; POWERS]; layout.cells()])
    }

    fn block(&self, layout: &Layout, span: &BlockSpan) -> BlockSums {
        BlockSums {
            lanes: span.lanes.clone(),
            quantities: layout.quantities,
            sums: vec![[0.0; POWERS]; layout.cells()],
        }
    }

    #[inline(always)]
    fn observe(&self, block: &mut BlockSums, time: usize, outputs: &[Lane]) {
        for (quantity, Lane(values)) in outputs.iter().enumerate() {
            let cell = time * block.quantities + quantity;
            let centre = self.centres[cell];
            let mut partial = [[0.0; 8]; POWERS];
            for lane in block.lanes.clone() {
                let distance = values[lane] - centre;
                let mut power = distance;
                for row in &mut partial {
                    row[lane % 8] += power;
                    power *= distance;
                }
            }
            for (sum, row) in block.sums[cell].iter_mut().zip(&partial) {
                *sum += row.iter().sum::<f64>();
            }
        }
    }

    fn accept(&self, total: &mut Self::Total, block: BlockSums) -> io::Result<()> {
        total.0 += block.lanes.len() as f64;
        for (sum, more) in total.1.iter_mut().zip(&block.sums) {
            for (s, m) in sum.iter_mut().zip(more) {
                *s += m;
            }
        }
        Ok(())
    }

    fn finish(self, (count, sums): Self::Total) -> Vec<MeanPowers> {
        let mean = |(centre, sums): (f64, [f64; POWERS])| MeanPowers {
            centre,
            count,
            means: sums.map(|s| s / count),
        };
        self.centres.into_iter().zip(sums).map(mean).collect()
    }
}

impl MeanPowers {
    /// Standard error of the mean of the k-th power.
    fn std_error(&self, k: usize) -> f64 {
        let spread = self.means[2 * k - 1] - self.means[k - 1].powi(2);
        (spread.max(0.0) / self.count).sqrt()
    }

    /// The sample mean with its standard error.
    #[must_use]
    pub fn mean(&self) -> (f64, f64) {
        (self.centre + self.means[0], self.std_error(1))
    }

    /// Mean, variance and third central moment against a law's, as far as they are known; the sums must have
    /// been taken about the law's mean.
    #[must_use]
    pub fn checks(&self, what: &str, law: &Moments) -> Vec<Check> {
        let check = |statistic: &str, k: usize, sample: f64, analytic: f64| Check {
            what: format!("{what} {statistic}"),
            sample,
            analytic,
            std_error: self.std_error(k),
        };
        let mut checks = Vec::new();
        if let Some(mean) = law.mean {
            checks.push(check("mean", 1, self.centre + self.means[0], mean));
        }
        if law.variance == Some(0.0) {
            // Nothing is random: the paths may differ by rounding, as a value of the size of the mean may.
            let spread = self.means[1].max(0.0).sqrt();
            let spread = self.centre + spread.copysign(self.centre);
            checks.push(check("extreme", 1, spread, self.centre));
        } else if let Some(variance) = law.variance {
            checks.push(check("variance", 2, self.means[1], variance));
        }
        // Where all paths agree there is no third moment to speak of.
        if let (Some(variance), Some(skewness)) = (law.variance, law.skewness)
            && variance > 0.0
        {
            let third = skewness * variance.powf(1.5);
            checks.push(check("third central moment", 3, self.means[2], third));
        }
        checks
    }
}

/// Runs a simulator and collects the power sums; every path must stay finite and in its domain.
///
/// # Panics
/// If the run does not take place or a path fails.
pub fn mean_powers<S: Simulator>(
    simulator: &S,
    grid: &Grid,
    run: &Run<'_>,
    centres: Vec<f64>,
) -> Vec<MeanPowers> {
    let outcome =
        simulate(simulator, grid, run, PowerSums { centres }).expect("the run takes place");
    assert_eq!(outcome.failures.non_finite, 0, "paths that are not finite");
    assert_eq!(
        outcome.failures.left_domain, 0,
        "paths that left their domain"
    );
    outcome.output
}

/// A number of paths that fills its last block only in part.
#[must_use]
pub fn uneven(paths: u64) -> u64 {
    paths / LANES as u64 * LANES as u64 + 77
}
