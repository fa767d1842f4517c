//! The transition law of a linear system whose coefficients change with time.

use super::multiply;
use crate::error::StepError;

/// Columns of the extrapolation: steps of 2, 4, ..., 2 * COLUMNS parts, order 2 * COLUMNS.
const COLUMNS: usize = 8;

/// What two neighbours on the diagonal of the extrapolation may differ by, relative to the size of
/// the entry: the later one is more accurate by another factor of that kind.
const TOLERANCE: f64 = 1e-14;

/// Columns before which nothing counts as settled: with fewer points a periodic coefficient may look
/// constant.
const FEWEST_COLUMNS: usize = 4;

/// Sub-steps of either part are at most this fraction of it, so that a short episode is not stepped over.
const PARTS: u64 = 8;

/// Units of time in a part: sub-steps are binary fractions of it, so that they add up to the whole.
const UNITS: u64 = 1 << 52;

/// Sub-steps tried in one call; beyond it the coefficients are singular or stiff past all use.
const LARGEST_EFFORT: usize = 20_000;

/// The law of `u(start + h)` given `u(start)` for `du = (a(t) u + alpha(t)) dt + noise`, where
/// the noise has the covariance rate `q(t)`:
/// `u(start + h) = e u(start) + shift + N(0, covariance)`.
///
/// `coefficients(t, out)` writes `a(t)`, `alpha(t)`, `q(t)` one after the other into
/// `out`. `e`, the shift and the covariance solve `e' = a e`, `m' = a m + alpha`,
/// `P' = a P + P a' + q` (Arnold 1974, "Stochastic Differential Equations", section 8.2), which
/// are integrated by extrapolation of the midpoint rule with control of the step (Hairer, Norsett,
/// Wanner 1993, "Solving Ordinary Differential Equations I", section II.9; Gragg 1965): entries
/// are accurate to about 1e-14 of the largest value that their row takes on the way. Coefficients with
/// a kink or a jump only cost more sub-steps.
///
/// Matrices are row-major with `dim * dim` entries, vectors have `dim`; where the coefficients
/// do not depend on time, [`linear_transition`](super::linear_transition) is faster.
///
/// # Errors
/// [`StepError::NotFinite`] if the result overflows; [`StepError::Unresolved`] if the coefficients have a
/// singularity within the step, or decay too fast to be followed.
///
/// # Panics
/// If a slice is shorter than its shape says.
///
/// ```
/// // Volatility 0.3 sqrt(t): the variance over [1, 3] is 0.09 (9 - 1)/2.
/// let (mut e, mut shift, mut variance) = ([0.0], [0.0], [0.0]);
/// driftwright_runtime::gauss::moving_transition(
///     1, 1.0, 2.0, |t, out| out.copy_from_slice(&[0.0, 0.0, 0.09 * t]),
///     &mut e, &mut shift, &mut variance).unwrap();
/// assert_eq!((e[0], shift[0]), (1.0, 0.0));
/// assert!((variance[0] - 0.36).abs() < 1e-14);
/// ```
pub fn moving_transition(
    dim: usize,
    start: f64,
    h: f64,
    coefficients: impl FnMut(f64, &mut [f64]),
    e: &mut [f64],
    shift: &mut [f64],
    covariance: &mut [f64],
) -> Result<(), StepError> {
    let size = dim * dim;
    let mut law = Law::new(dim, coefficients);
    // Cut at the golden section: points evenly spaced over whole periods would all see one phase.
    let first = 0.618_033_988_749_894_8 * h;
    let unresolved = StepError::Unresolved { start, length: h };
    for (from, length) in [(start, first), (start + first, h - first)] {
        law.advance(from, length)
            .ok_or_else(|| unresolved.clone())?;
    }
    if let Some(&value) = law.value.iter().find(|v| !v.is_finite()) {
        let name = "the law of a linear system over one step".into();
        return Err(StepError::NotFinite { name, value });
    }
    e[..size].copy_from_slice(&law.value[..size]);
    shift[..dim].copy_from_slice(&law.value[size..size + dim]);
    // Rounding leaves an asymmetry that no covariance has.
    let spread = &law.value[size + dim..];
    for i in 0..dim {
        for j in 0..dim {
            covariance[i * dim + j] = 0.5 * (spread[i * dim + j] + spread[j * dim + i]);
        }
    }
    Ok(())
}

/// `e`, the shift and the covariance one after the other, and what it takes to move them on.
struct Law<F> {
    dim: usize,
    coefficients: F,
    /// `a`, `alpha`, `q` at the instant they were last asked for.
    current: Vec<f64>,
    value: Vec<f64>,
    /// The largest size each entry of `value` is measured by so far.
    scale: Vec<f64>,
    product: Vec<f64>,
}

impl<F: FnMut(f64, &mut [f64])> Law<F> {
    fn new(dim: usize, coefficients: F) -> Self {
        let size = 2 * dim * dim + dim;
        let mut value = vec![0.0; size];
        for i in 0..dim {
            value[i * dim + i] = 1.0;
        }
        let mut law = Self {
            dim,
            coefficients,
            current: vec![0.0; size],
            scale: vec![0.0; size],
            value,
            product: vec![0.0; dim * dim],
        };
        law.scale = law.sizes(&law.value);
        law
    }

    /// From `start` to `start + length`, in sub-steps short enough for the extrapolation to settle; none
    /// where none is.
    fn advance(&mut self, start: f64, length: f64) -> Option<()> {
        let unit = length / UNITS as f64;
        let (mut done, mut size) = (0, UNITS / PARTS);
        for _ in 0..LARGEST_EFFORT {
            match self.attempt(start + done as f64 * unit, size as f64 * unit) {
                Some((value, columns)) => {
                    self.accept(value);
                    done += size;
                    if done == UNITS {
                        return Some(());
                    }
                    // Twice as long only where the grid of such sub-steps allows it.
                    let room = size < UNITS / PARTS && done.is_multiple_of(2 * size);
                    if columns < COLUMNS - 1 && room {
                        size *= 2;
                    }
                }
                None if size == 1 => return None,
                None => size /= 2,
            }
        }
        None
    }

    fn accept(&mut self, value: Vec<f64>) {
        let sizes = self.sizes(&value);
        for (scale, size) in self.scale.iter_mut().zip(sizes) {
            *scale = scale.max(size);
        }
        self.value = value;
    }

    /// What errors are measured by: the largest entry of a row of `e`, the entry itself in the shift,
    /// the standard deviations in the covariance.
    fn sizes(&self, value: &[f64]) -> Vec<f64> {
        let dim = self.dim;
        let (e, rest) = value.split_at(dim * dim);
        let (shift, covariance) = rest.split_at(dim);
        let largest = |i: usize| {
            let row = &e[i * dim..(i + 1) * dim];
            row.iter().fold(0.0, |m: f64, x| m.max(x.abs()))
        };
        let deviation = |i: usize| covariance[i * dim + i].abs().sqrt();
        let growth = (0..dim * dim).map(|n| largest(n / dim));
        let spread = (0..dim * dim).map(|n| deviation(n / dim) * deviation(n % dim));
        growth
            .chain(shift.iter().map(|x| x.abs()))
            .chain(spread)
            .collect()
    }

    /// The value after a sub-step and the columns it took; none where the extrapolation does not settle.
    fn attempt(&mut self, from: f64, length: f64) -> Option<(Vec<f64>, usize)> {
        let slope = self.slope(from, &self.value.clone());
        let mut last: Vec<Vec<f64>> = Vec::new();
        for j in 0..COLUMNS {
            let mut row = vec![self.midpoint(from, length, 2 * (j + 1), &slope)];
            for k in 1..=j {
                let ratio = (j + 1) as f64 / (j + 1 - k) as f64;
                let weight = 1.0 / (ratio * ratio - 1.0);
                let pairs = row[k - 1].iter().zip(&last[k - 1]);
                row.push(pairs.map(|(new, old)| new + (new - old) * weight).collect());
            }
            if j + 1 >= FEWEST_COLUMNS && self.settled(&row[j], &row[j - 1]) {
                return row.pop().map(|value| (value, j + 1));
            }
            last = row;
        }
        None
    }

    /// Whether two values agree, and no variance is negative, as it is beyond a pole of the coefficients.
    fn settled(&self, new: &[f64], old: &[f64]) -> bool {
        let sizes = self.sizes(new);
        let entries = new.iter().zip(old).zip(self.scale.iter().zip(sizes));
        let agree = |((new, old), (scale, size)): ((&f64, &f64), (&f64, f64))| {
            (new - old).abs() <= TOLERANCE * scale.max(size)
        };
        let variances = new[self.dim * self.dim + self.dim..]
            .iter()
            .step_by(self.dim + 1);
        let scales = self.scale[self.dim * self.dim + self.dim..]
            .iter()
            .step_by(self.dim + 1);
        entries.into_iter().all(agree)
            && variances
                .zip(scales)
                .all(|(v, scale)| *v >= -TOLERANCE * scale)
    }

    /// The midpoint rule with an even number of parts, smoothed at the end (Gragg 1965): its error has
    /// even powers of their length only, and it looks at the end of the sub-step too.
    fn midpoint(&mut self, from: f64, length: f64, parts: usize, slope: &[f64]) -> Vec<f64> {
        let part = length / parts as f64;
        let mut before = self.value.clone();
        let mut now: Vec<f64> = before
            .iter()
            .zip(slope)
            .map(|(y, s)| y + part * s)
            .collect();
        for i in 1..parts {
            let slope = self.slope(from + i as f64 * part, &now);
            for (y, s) in before.iter_mut().zip(&slope) {
                *y += 2.0 * part * s;
            }
            std::mem::swap(&mut before, &mut now);
        }
        let slope = self.slope(from + length, &now);
        let entries = now.iter().zip(&before).zip(&slope);
        entries
            .map(|((now, before), s)| 0.5 * (now + before + part * s))
            .collect()
    }

    /// The right-hand side of the equations.
    fn slope(&mut self, t: f64, value: &[f64]) -> Vec<f64> {
        let (dim, size) = (self.dim, self.dim * self.dim);
        (self.coefficients)(t, &mut self.current);
        let (a, rest) = self.current.split_at(size);
        let (alpha, q) = rest.split_at(dim);
        let (e, rest) = value.split_at(size);
        let (shift, covariance) = rest.split_at(dim);
        let mut slope = vec![0.0; 2 * size + dim];
        multiply(dim, a, e, &mut slope[..size]);
        for i in 0..dim {
            let row = a[i * dim..(i + 1) * dim].iter().zip(shift);
            slope[size + i] = row.map(|(a, m)| a * m).sum::<f64>() + alpha[i];
        }
        multiply(dim, a, covariance, &mut self.product);
        for (n, entry) in slope[size + dim..].iter_mut().enumerate() {
            let transposed = n % dim * dim + n / dim;
            *entry = self.product[n] + self.product[transposed] + q[n];
        }
        slope
    }
}
