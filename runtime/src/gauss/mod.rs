//! Small dense linear algebra behind the coefficients of Gaussian steps.
//!
//! Matrices are row-major slices. All but [`correlate`], which steps paths, runs while a run is prepared,
//! in unfused arithmetic on one thread, so its results are the same bits everywhere.

mod cholesky;
mod correlate;
mod moving;
mod transition;

pub use cholesky::{cholesky, symmetric};
pub use correlate::correlate;
pub use moving::moving_transition;
pub use transition::linear_transition;

/// `out = left * right` for square matrices.
fn multiply(dim: usize, left: &[f64], right: &[f64], out: &mut [f64]) {
    for i in 0..dim {
        for j in 0..dim {
            let terms = (0..dim).map(|k| left[i * dim + k] * right[k * dim + j]);
            out[i * dim + j] = terms.sum();
        }
    }
}
