//! Transition laws and Cholesky factors against the crate `nalgebra`, and closed forms.

use driftwright_runtime::gauss::{cholesky, linear_transition};
use driftwright_runtime::random::{threefry2x64_20, uniform};
use driftwright_runtime::{StepError, math};
use nalgebra::DMatrix;

/// A matrix with entries between -1 and 1.
fn random_matrix(dim: usize, stream: u64) -> DMatrix<f64> {
    let entry = |i: usize, j: usize| {
        let word = threefry2x64_20([3, stream], [i as u64, j as u64])[0];
        2.0 * uniform(word) - 1.0
    };
    DMatrix::from_fn(dim, dim, entry)
}

/// The entries in row-major order.
fn rows(matrix: &DMatrix<f64>) -> Vec<f64> {
    matrix.transpose().as_slice().to_vec()
}

/// The largest difference, relative to the largest entry.
fn distance(ours: &[f64], theirs: &DMatrix<f64>) -> f64 {
    let theirs = rows(theirs);
    assert_eq!(ours.len(), theirs.len());
    let gaps = ours.iter().zip(&theirs).map(|(a, b)| (a - b).abs());
    let size = theirs.iter().fold(1e-300, |m: f64, x| m.max(x.abs()));
    gaps.fold(0.0, f64::max) / size
}

/// C. F. Van Loan, "Computing integrals involving the matrix exponential" (1978): the
/// exponential of [[-a, q], [0, a']] h holds the covariance, that of [[a, alpha], [0, 0]] h the
/// shift. Done here with `nalgebra`'s exponential, for moderate rates.
#[test]
fn transition_agrees_with_van_loan() {
    for dim in 1..=6 {
        for (stream, h) in [(1, 0.01), (2, 0.3), (3, 2.0)] {
            let a = random_matrix(dim, stream);
            let root = random_matrix(dim, stream + 10);
            let q = &root * root.transpose();
            let alpha = random_matrix(dim, stream + 20).column(0).into_owned();
            let mut block = DMatrix::zeros(2 * dim, 2 * dim);
            block.view_mut((0, 0), (dim, dim)).copy_from(&-&a);
            block.view_mut((0, dim), (dim, dim)).copy_from(&q);
            block
                .view_mut((dim, dim), (dim, dim))
                .copy_from(&a.transpose());
            let exponential = (block * h).exp();
            let e = exponential.view((dim, dim), (dim, dim)).transpose();
            let covariance = &e * exponential.view((0, dim), (dim, dim));
            let mut bordered = DMatrix::zeros(dim + 1, dim + 1);
            bordered.view_mut((0, 0), (dim, dim)).copy_from(&a);
            bordered.view_mut((0, dim), (dim, 1)).copy_from(&alpha);
            let shift = (bordered * h).exp().view((0, dim), (dim, 1)).into_owned();

            let (mut ours_e, mut ours_c) = (vec![0.0; dim * dim], vec![0.0; dim * dim]);
            let mut ours_shift = vec![0.0; dim];
            linear_transition(
                dim,
                &rows(&a),
                alpha.as_slice(),
                &rows(&q),
                h,
                &mut ours_e,
                &mut ours_shift,
                &mut ours_c,
            )
            .expect("moderate rates");
            let shift = DMatrix::from_column_slice(dim, 1, shift.as_slice());
            assert!(distance(&ours_e, &e) < 1e-13);
            assert!(distance(&ours_shift, &shift) < 1e-13);
            assert!(distance(&ours_c, &covariance) < 1e-13);
        }
    }
}

/// One mean-reverting coordinate and its integral, `dx = -k x dt + s dW, dy = x dt`: the
/// covariances are known in closed form, and have removable singularities at k = 0.
#[test]
fn stiff_and_vanishing_rates() {
    let (s, h) = (0.3_f64, 0.5_f64);
    for k in [0.0, 1e-12, 1e-6, 1.0, 700.0, 1e5] {
        let (mut e, mut shift, mut c) = ([0.0; 4], [0.0; 2], [0.0; 4]);
        let a = [-k, 0.0, 1.0, 0.0];
        let q = [s * s, 0.0, 0.0, 0.0];
        linear_transition(2, &a, &[k, 0.0], &q, h, &mut e, &mut shift, &mut c).expect("a law");
        let ratio = |x: f64| math::expm1_ratio::<driftwright_runtime::Unfused>(x);
        let decay = (-k * h).exp();
        // int_0^h exp(-k u) du, and the variance of x.
        let mean_time = h * ratio(-k * h);
        let variance = s * s * h * ratio(-2.0 * k * h);
        // Cov(x, y) = s^2 (int_0^h exp(-k u) du)^2 / 2.
        let cross = 0.5 * s * s * mean_time * mean_time;
        assert!((e[0] - decay).abs() < 1e-15, "k = {k}: {}", e[0]);
        for (ours, truth) in [
            (e[2], mean_time),
            (shift[0], k * mean_time),
            (c[0], variance),
            (c[1], cross),
            (c[2], cross),
        ] {
            let bound = 2e-14 * truth.abs() + 1e-300;
            assert!(
                (ours - truth).abs() <= bound,
                "k = {k}: {ours} instead of {truth}"
            );
        }
    }
    let mut out = ([0.0], [0.0], [0.0]);
    let explosive = linear_transition(
        1,
        &[1e4],
        &[0.0],
        &[1.0],
        1.0,
        &mut out.0,
        &mut out.1,
        &mut out.2,
    );
    assert!(matches!(explosive, Err(StepError::NotFinite { .. })));
}

/// Positive definite matrices against `nalgebra`'s factor.
#[test]
fn cholesky_agrees_with_another_library() {
    for dim in 1..=8 {
        let root = random_matrix(dim, 40);
        let matrix = &root * root.transpose() + DMatrix::identity(dim, dim) * 0.01;
        let mut factor = vec![0.0; dim * dim];
        cholesky(dim, &rows(&matrix), &mut factor).expect("positive definite");
        let theirs = matrix.cholesky().expect("positive definite").l();
        assert!(distance(&factor, &theirs) < 1e-12);
    }
}

/// Singular matrices are reproduced by their factor; matrices with a negative direction, even
/// a slight one, are refused.
#[test]
fn cholesky_at_the_edge() {
    for rank in 1..5 {
        let dim = 6;
        let root = random_matrix(dim, 50).columns(0, rank).into_owned();
        let matrix = &root * root.transpose();
        let mut factor = vec![0.0; dim * dim];
        cholesky(dim, &rows(&matrix), &mut factor).expect("positive semidefinite");
        let factor = DMatrix::from_row_slice(dim, dim, &factor);
        assert!(distance(&rows(&(&factor * factor.transpose())), &matrix) < 1e-13);
        let mut slightly = matrix.clone();
        slightly[(dim - 1, dim - 1)] -= 1e-9;
        let refused = cholesky(dim, &rows(&slightly), &mut [0.0; 36]);
        assert!(matches!(
            refused,
            Err(StepError::NotPositiveSemidefinite { .. })
        ));
    }
    let mut factor = [0.0; 9];
    let contradictory = [1.0, 0.9, 0.9, 0.9, 1.0, -0.9, 0.9, -0.9, 1.0];
    let refused = cholesky(3, &contradictory, &mut factor).unwrap_err();
    assert!(matches!(
        refused,
        StepError::NotPositiveSemidefinite { row: 2, .. }
    ));
    let zero_variance = [0.0, 0.1, 0.1, 1.0];
    assert!(cholesky(2, &zero_variance, &mut factor).is_err());
    assert!(cholesky(2, &[1.0, f64::NAN, f64::NAN, 1.0], &mut factor).is_err());
    cholesky(2, &[0.0, 0.0, 0.0, 4.0], &mut factor).expect("a state without noise");
    assert_eq!(factor[..4], [0.0, 0.0, 0.0, 2.0]);
}
