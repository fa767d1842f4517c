//! The transition law of a linear system driven by Gaussian noise.

use super::multiply;
use crate::error::StepError;

/// Terms of the series: with a norm of at most 1/2 the 20th is below 1e-20 of the first.
const TERMS: usize = 20;

/// The law of `u(t + h)` given `u(t)` for `du = (a u + alpha) dt + noise`, where the noise
/// has the covariance rate `q` (all constant over the step):
/// `u(t + h) = e u(t) + shift + N(0, covariance)`, that is `e = exp(a h)`,
/// `shift = int_0^h exp(a s) alpha ds`, `covariance = int_0^h exp(a s) q exp(a' s) ds`.
///
/// The integrals are those of Van Loan, "Computing integrals involving the matrix
/// exponential", IEEE Trans. Automat. Control 23 (1978), but evaluated by their Taylor
/// series over `h / 2^s` and doubled `s` times. The block exponential of that paper holds
/// `exp(-a h)` too, which overflows for fast mean reversion; doubling does not. `exp - 1`
/// is what is squared, so that slow rates keep their digits beside fast ones and `a = 0` needs
/// no case; entries of `e` are accurate to rounding errors of 1, however small they are.
///
/// Matrices are row-major with `dim * dim` entries, vectors have `dim`.
///
/// # Errors
/// [`StepError::NotFinite`] if the result overflows.
///
/// # Panics
/// If a slice is shorter than its shape says.
///
/// ```
/// // Mean reversion at rate 2 to the level 0.5 with volatility 0.3, over a step of 0.25.
/// let (mut e, mut shift, mut variance) = ([0.0], [0.0], [0.0]);
/// driftwright_runtime::gauss::linear_transition(
///     1, &[-2.0], &[1.0], &[0.09], 0.25, &mut e, &mut shift, &mut variance).unwrap();
/// assert!((e[0] - (-0.5_f64).exp()).abs() < 1e-15);
/// assert!((shift[0] - 0.5 * (1.0 - (-0.5_f64).exp())).abs() < 1e-15);
/// assert!((variance[0] - 0.09 / 4.0 * (1.0 - (-1.0_f64).exp())).abs() < 1e-16);
/// ```
#[allow(clippy::too_many_arguments)] // three inputs and three outputs of one law
pub fn linear_transition(
    dim: usize,
    a: &[f64],
    alpha: &[f64],
    q: &[f64],
    h: f64,
    e: &mut [f64],
    shift: &mut [f64],
    covariance: &mut [f64],
) -> Result<(), StepError> {
    let size = dim * dim;
    let (a, q) = (&a[..size], &q[..size]);
    let (doublings, tau) = short_step(dim, a, h);
    let mut law = Law::series(dim, a, &alpha[..dim], q, tau);
    for _ in 0..doublings {
        law.double();
    }
    for i in 0..dim {
        law.growth[i * dim + i] += 1.0;
    }
    let entries = law.growth.iter().chain(&law.shift).chain(&law.covariance);
    if let Some(&value) = entries.into_iter().find(|v| !v.is_finite()) {
        let name = "the law of a linear system over one step".into();
        return Err(StepError::NotFinite { name, value });
    }
    e[..size].copy_from_slice(&law.growth);
    shift[..dim].copy_from_slice(&law.shift);
    covariance[..size].copy_from_slice(&law.covariance);
    Ok(())
}

/// Halves the step until the norm of `a` times it is at most 1/2; returns how often, and
/// the short step. The norm is the larger of the row-sum and the column-sum norm.
fn short_step(dim: usize, a: &[f64], h: f64) -> (u32, f64) {
    let norm = |row: &[f64]| row.iter().map(|x| x.abs()).sum::<f64>();
    let rows = a.chunks(dim.max(1)).map(norm);
    let columns = (0..dim).map(|j| (0..dim).map(|i| a[i * dim + j].abs()).sum::<f64>());
    let norm = rows.chain(columns).fold(0.0, f64::max);
    let (mut count, mut tau) = (0, h);
    while norm.is_finite() && norm * tau > 0.5 {
        tau *= 0.5;
        count += 1;
    }
    (count, tau)
}

/// A transition law: `exp(a h) - 1`, the shift and the covariance.
struct Law {
    dim: usize,
    growth: Vec<f64>,
    shift: Vec<f64>,
    covariance: Vec<f64>,
}

impl Law {
    /// The law over a short step, by the Taylor series of its three integrals.
    fn series(dim: usize, a: &[f64], alpha: &[f64], q: &[f64], tau: f64) -> Law {
        let scaled: Vec<f64> = a.iter().map(|x| x * tau).collect();
        let times = |factor: f64, v: &[f64]| v.iter().map(|x| x * factor).collect::<Vec<_>>();
        let mut law = Law {
            dim,
            growth: scaled.clone(),
            shift: times(tau, alpha),
            covariance: times(tau, q),
        };
        let mut power = scaled.clone();
        let mut drift = law.shift.clone();
        let mut spread = law.covariance.clone();
        let mut product = vec![0.0; dim * dim];
        for k in 2..=TERMS {
            let inverse = 1.0 / k as f64;
            multiply(dim, &scaled, &power, &mut product);
            power = times(inverse, &product);
            drift = times(inverse, &apply(dim, &scaled, &drift));
            multiply(dim, &scaled, &spread, &mut product);
            spread = symmetric_sum(dim, &product, inverse);
            add(&mut law.growth, &power);
            add(&mut law.shift, &drift);
            add(&mut law.covariance, &spread);
        }
        law
    }

    /// The law over twice the step.
    fn double(&mut self) {
        let dim = self.dim;
        let mut product = vec![0.0; dim * dim];
        let moved = apply(dim, &self.growth, &self.shift);
        for (shift, moved) in self.shift.iter_mut().zip(moved) {
            *shift = 2.0 * *shift + moved;
        }
        // e c e' with e = 1 + f is c + f c + c f' + f c f'.
        multiply(dim, &self.growth, &self.covariance, &mut product);
        let crossed = symmetric_sum(dim, &product, 1.0);
        let outer = multiply_transposed(dim, &product, &self.growth);
        for (i, c) in self.covariance.iter_mut().enumerate() {
            *c = 2.0 * *c + (crossed[i] + outer[i]);
        }
        // Rounding leaves an asymmetry, which doubling would double.
        self.covariance = symmetric_sum(dim, &self.covariance, 0.5);
        multiply(dim, &self.growth, &self.growth, &mut product);
        for (f, squared) in self.growth.iter_mut().zip(&product) {
            *f = 2.0 * *f + squared;
        }
    }
}

/// `matrix * vector`.
fn apply(dim: usize, matrix: &[f64], vector: &[f64]) -> Vec<f64> {
    let row = |i: usize| (0..dim).map(|k| matrix[i * dim + k] * vector[k]).sum();
    (0..dim).map(row).collect()
}

/// `factor * (matrix + matrix')`.
fn symmetric_sum(dim: usize, matrix: &[f64], factor: f64) -> Vec<f64> {
    let entry = |n: usize| matrix[n] + matrix[n % dim * dim + n / dim];
    (0..dim * dim).map(|n| factor * entry(n)).collect()
}

/// `left * right'`.
fn multiply_transposed(dim: usize, left: &[f64], right: &[f64]) -> Vec<f64> {
    let entry = |i: usize, j: usize| {
        (0..dim)
            .map(|k| left[i * dim + k] * right[j * dim + k])
            .sum()
    };
    (0..dim * dim).map(|n| entry(n / dim, n % dim)).collect()
}

fn add(sum: &mut [f64], term: &[f64]) {
    for (s, t) in sum.iter_mut().zip(term) {
        *s += t;
    }
}
