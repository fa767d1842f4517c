//! Cholesky factors of positive semidefinite matrices.

use crate::error::StepError;

/// A pivot below this multiple of `dim` times the diagonal entry counts as zero: it is
/// what rounding leaves of an exactly singular matrix.
const ZERO_PIVOT: f64 = 64.0 * f64::EPSILON;

/// The lower triangular factor `L` with `L L' = covariance`, row-major, `dim * dim` entries.
///
/// Singular matrices are allowed: a pivot within `64 dim eps` of its diagonal entry is
/// taken as zero and gives a zero column, so that `L L'` still reproduces the matrix.
/// Only the lower triangle of `covariance` is read.
///
/// # Errors
/// [`StepError::NotPositiveSemidefinite`] if a pivot is below that tolerance, or a zero
/// pivot has a column that is not zero; [`StepError::NotFinite`] if an entry is not finite.
///
/// # Panics
/// If a slice is shorter than `dim * dim`.
///
/// ```
/// let mut factor = [0.0; 4];
/// driftwright_runtime::gauss::cholesky(2, &[4.0, 2.0, 2.0, 5.0], &mut factor).unwrap();
/// assert_eq!(factor, [2.0, 0.0, 1.0, 2.0]);
/// ```
pub fn cholesky(dim: usize, covariance: &[f64], factor: &mut [f64]) -> Result<(), StepError> {
    factor[..dim * dim].fill(0.0);
    let tolerance = ZERO_PIVOT * dim as f64;
    for j in 0..dim {
        let diagonal = covariance[j * dim + j];
        let pivot = residual(dim, covariance, factor, j, j);
        if !pivot.is_finite() {
            return Err(not_finite(pivot));
        }
        let zero = pivot <= tolerance * diagonal.abs();
        if pivot < -tolerance * diagonal.abs() {
            return Err(indefinite(j, pivot, diagonal));
        }
        let root = if zero { 0.0 } else { pivot.sqrt() };
        factor[j * dim + j] = root;
        for i in j + 1..dim {
            let rest = residual(dim, covariance, factor, i, j);
            if !rest.is_finite() {
                return Err(not_finite(rest));
            }
            if !zero {
                factor[i * dim + j] = rest / root;
                continue;
            }
            // The minor of rows i and j must not be negative: rest^2 <= pivot_i * pivot_j.
            let scale = (diagonal.abs() * covariance[i * dim + i].abs()).sqrt();
            if rest.abs() > tolerance.sqrt() * scale {
                return Err(indefinite(i, -rest.abs(), scale));
            }
        }
    }
    Ok(())
}

/// A symmetric matrix from its lower triangle, row by row, in runs of equal entries: `(length, entry)`.
///
/// # Panics
/// If the runs are longer than the triangle.
///
/// ```
/// use driftwright_runtime::gauss::symmetric;
/// assert_eq!(symmetric(2, &[(1, 4.0), (1, 2.0), (1, 5.0)]), [4.0, 2.0, 2.0, 5.0]);
/// ```
#[must_use]
pub fn symmetric(dim: usize, runs: &[(usize, f64)]) -> Vec<f64> {
    let mut matrix = vec![0.0; dim * dim];
    let (mut row, mut column) = (0, 0);
    for &(length, entry) in runs {
        for _ in 0..length {
            matrix[row * dim + column] = entry;
            matrix[column * dim + row] = entry;
            (row, column) = if column == row {
                (row + 1, 0)
            } else {
                (row, column + 1)
            };
        }
    }
    matrix
}

/// Entry `(i, j)` of the covariance less what the first `j` columns of the factor explain.
fn residual(dim: usize, covariance: &[f64], factor: &[f64], i: usize, j: usize) -> f64 {
    let explained = (0..j).map(|k| factor[i * dim + k] * factor[j * dim + k]);
    covariance[i * dim + j] - explained.sum::<f64>()
}

fn indefinite(row: usize, pivot: f64, scale: f64) -> StepError {
    let pivot = if scale == 0.0 { pivot } else { pivot / scale };
    StepError::NotPositiveSemidefinite { row, pivot }
}

fn not_finite(value: f64) -> StepError {
    StepError::NotFinite {
        name: "an entry of a covariance".into(),
        value,
    }
}
