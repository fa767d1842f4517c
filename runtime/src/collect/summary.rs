//! Moments and extremes of a sample, and their sum over samples.

use super::tree::Merge;
use crate::lane::{LANES, Lane};

/// Count, mean, central sums and extremes of a sample.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Summary {
    /// How many values.
    pub count: u64,
    /// Their mean.
    pub mean: f64,
    /// The sums of the second, third and fourth powers of the differences from the mean.
    pub central: [f64; 3],
    /// The least value.
    pub minimum: f64,
    /// The greatest value.
    pub maximum: f64,
}

impl Summary {
    /// No values.
    pub const EMPTY: Summary = Summary {
        count: 0,
        mean: 0.0,
        central: [0.0; 3],
        minimum: f64::INFINITY,
        maximum: f64::NEG_INFINITY,
    };

    /// The variance, with divisor `n - 1`; NaN for one value.
    #[must_use]
    pub fn variance(&self) -> f64 {
        self.central[0] / (self.count as f64 - 1.0)
    }

    /// The standard error of the mean.
    #[must_use]
    pub fn std_error(&self) -> f64 {
        (self.variance() / self.count as f64).sqrt()
    }

    /// The skewness of the sample taken as a population; NaN if all values are equal.
    #[must_use]
    pub fn skewness(&self) -> f64 {
        let [m2, m3, _] = self.central_moments();
        m3 / (m2 * m2.sqrt())
    }

    /// The excess kurtosis of the sample taken as a population; NaN if all values are equal.
    #[must_use]
    pub fn excess_kurtosis(&self) -> f64 {
        let [m2, _, m4] = self.central_moments();
        m4 / (m2 * m2) - 3.0
    }

    /// The standard error of [`Summary::variance`] to leading order, `sqrt((m4 - m2^2)/n)`.
    #[must_use]
    pub fn variance_std_error(&self) -> f64 {
        let [m2, _, m4] = self.central_moments();
        ((m4 - m2 * m2) / self.count as f64).sqrt()
    }

    /// The second, third and fourth central moments, with divisor `n`.
    #[must_use]
    pub fn central_moments(&self) -> [f64; 3] {
        self.central.map(|sum| sum / self.count as f64)
    }

    /// Adds the values of another sample (T. F. Chan, G. H. Golub, R. J. LeVeque 1979 for the
    /// variance; P. Pebay, Sandia report SAND2008-6212, for higher moments): both samples are
    /// shifted to the common mean by the binomial formula.
    ///
    /// ```
    /// use driftwright_runtime::collect::Summary;
    /// let mut both = Summary::of(&[1.0, 2.0, 4.0]);
    /// both.merge(&Summary::of(&[8.0, 16.0]));
    /// let whole = Summary::of(&[1.0, 2.0, 4.0, 8.0, 16.0]);
    /// assert!((both.skewness() - whole.skewness()).abs() < 1e-14);
    /// ```
    pub fn merge(&mut self, other: &Summary) {
        if other.count == 0 {
            return;
        }
        if self.count == 0 {
            *self = *other;
            return;
        }
        let (a, b) = (self.count as f64, other.count as f64);
        let gap = other.mean - self.mean;
        let left = self.shifted(-gap * (b / (a + b)));
        let right = other.shifted(gap * (a / (a + b)));
        self.count += other.count;
        self.mean += gap * (b / (a + b));
        self.central = [0, 1, 2].map(|i| left[i] + right[i]);
        self.minimum = self.minimum.min(other.minimum);
        self.maximum = self.maximum.max(other.maximum);
    }

    /// The central sums about a point `d` below the mean.
    fn shifted(&self, d: f64) -> [f64; 3] {
        let [s2, s3, s4] = self.central;
        let n = self.count as f64;
        let d2 = d * d;
        [
            s2 + n * d2,
            s3 + 3.0 * d * s2 + n * d2 * d,
            s4 + 4.0 * d * s3 + 6.0 * d2 * s2 + n * d2 * d2,
        ]
    }

    /// The summary of up to [`LANES`] values.
    ///
    /// # Panics
    /// If there are more.
    #[must_use]
    pub fn of(values: &[f64]) -> Summary {
        let mut lane = Lane::ZERO;
        lane[..values.len()].copy_from_slice(values);
        Summary::of_lane(&lane, 0..values.len())
    }

    /// The summary of some lanes of a block. Sums are halving trees over all lanes.
    #[inline(always)]
    pub(super) fn of_lane(values: &Lane, live: std::ops::Range<usize>) -> Summary {
        let count = live.len();
        if count == 0 {
            return Summary::EMPTY;
        }
        let mut lane = *values;
        fill_others(&mut lane, &live, values[live.start]);
        let (minimum, maximum) = extremes(&lane);
        fill_others(&mut lane, &live, 0.0);
        let mean = halving_sum(lane) / count as f64;
        fill_others(&mut lane, &live, mean);
        let (mut second, mut third, mut fourth) = (Lane::ZERO, Lane::ZERO, Lane::ZERO);
        for i in 0..LANES {
            let d = lane[i] - mean;
            let square = d * d;
            second[i] = square;
            third[i] = square * d;
            fourth[i] = square * square;
        }
        Summary {
            count: count as u64,
            mean,
            central: [second, third, fourth].map(halving_sum),
            minimum,
            maximum,
        }
    }
}

/// Overwrites the lanes that do not belong to the run.
#[inline(always)]
fn fill_others(lane: &mut Lane, live: &std::ops::Range<usize>, value: f64) {
    if live.len() < LANES {
        lane[..live.start].fill(value);
        lane[live.end..].fill(value);
    }
}

/// The sum of a lane: its upper half is added to the lower until one value is left.
#[inline(always)]
pub(super) fn halving_sum(mut lane: Lane) -> f64 {
    let mut width = LANES / 2;
    while width > 0 {
        let (low, high) = lane.split_at_mut(width);
        for (a, b) in low.iter_mut().zip(&high[..width]) {
            *a += *b;
        }
        width /= 2;
    }
    lane[0]
}

/// The least and the greatest value of a lane; values that are not a number do not count.
#[inline(always)]
fn extremes(lane: &Lane) -> (f64, f64) {
    let (mut least, mut greatest) = (Lane::splat(f64::INFINITY), Lane::splat(f64::NEG_INFINITY));
    let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
    const WIDTH: usize = 16;
    for chunk in lane.chunks_exact(WIDTH) {
        for i in 0..WIDTH {
            let x = chunk[i];
            least[i] = if x < least[i] { x } else { least[i] };
            greatest[i] = if x > greatest[i] { x } else { greatest[i] };
        }
    }
    for i in 0..WIDTH {
        low = low.min(least[i]);
        high = high.max(greatest[i]);
    }
    (low, high)
}

impl Merge for Summary {
    fn merge(&mut self, other: &Summary) {
        Summary::merge(self, other);
    }
}
