//! Correlated normal draws of many sources: a triangular matrix times their lanes.

use crate::arith::Arith;
use crate::lane::{LANES, Lane};

/// Rows that are summed at a time, so that a draw that was loaded is used more than once.
const ROWS: usize = 4;

/// Lanes that are summed at a time, so that the sums stay in registers.
const WIDTH: usize = 16;

/// `out[i] = sum_{k <= i} factor[i, k] * noise[sources[k]]` on every lane. `factor` is a lower triangular
/// matrix of `sources.len()` rows, row-major, zeros above its diagonal included.
///
/// A row is summed from zero and from its first column on, each product by a multiply-add of the class:
/// the same bits whatever the instruction set.
///
/// # Panics
/// If `factor` or `out` is shorter than the sources ask for, or a source is not among the noise.
///
/// ```
/// use driftwright_runtime::{Lane, Unfused, gauss};
/// let noise = [Lane::splat(1.0), Lane::splat(10.0)];
/// let mut out = [Lane::ZERO; 2];
/// gauss::correlate::<Unfused>(&[2.0, 0.0, 3.0, 4.0], &[0, 1], &noise, &mut out);
/// assert_eq!((out[0][0], out[1][255]), (2.0, 43.0));
/// ```
#[inline(always)]
pub fn correlate<A: Arith>(factor: &[f64], sources: &[usize], noise: &[Lane], out: &mut [Lane]) {
    let dim = sources.len();
    let whole = dim - dim % ROWS;
    for first in (0..whole).step_by(ROWS) {
        rows::<A, ROWS>(first, factor, sources, noise, out);
    }
    for first in whole..dim {
        rows::<A, 1>(first, factor, sources, noise, out);
    }
}

/// `N` rows from `first` on. Above the diagonal they add products with zero.
#[inline(always)]
fn rows<A: Arith, const N: usize>(
    first: usize,
    factor: &[f64],
    sources: &[usize],
    noise: &[Lane],
    out: &mut [Lane],
) {
    let dim = sources.len();
    let mut entries = [&factor[..0]; N];
    for (row, entries) in entries.iter_mut().enumerate() {
        *entries = &factor[(first + row) * dim..][..first + N];
    }
    for begin in (0..LANES).step_by(WIDTH) {
        let mut sums = [[0.0; WIDTH]; N];
        for (column, &source) in sources[..first + N].iter().enumerate() {
            let draws = &noise[source].0[begin..begin + WIDTH];
            for (sums, entries) in sums.iter_mut().zip(&entries) {
                let entry = entries[column];
                for (sum, &draw) in sums.iter_mut().zip(draws) {
                    *sum = A::mul_add(entry, draw, *sum);
                }
            }
        }
        for (row, sums) in sums.iter().enumerate() {
            out[first + row].0[begin..begin + WIDTH].copy_from_slice(sums);
        }
    }
}
