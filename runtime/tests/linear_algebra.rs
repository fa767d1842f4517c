//! Transition laws and Cholesky factors against the crate `nalgebra`, and closed forms.

use driftwright_runtime::gauss::{
    cholesky, correlate, linear_transition, moving_transition, symmetric,
};
use driftwright_runtime::random::{threefry2x64_20, uniform};
use driftwright_runtime::{Fused, LANES, Lane, StepError, Unfused, math};
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

/// The law of one row over `[start, start + h]` with coefficients `(a, alpha, q)` of time.
fn moving(
    start: f64,
    h: f64,
    coefficients: impl Fn(f64) -> [f64; 3],
) -> Result<[f64; 3], StepError> {
    let (mut e, mut shift, mut variance) = ([0.0], [0.0], [0.0]);
    let write = |t: f64, out: &mut [f64]| out.copy_from_slice(&coefficients(t));
    moving_transition(1, start, h, write, &mut e, &mut shift, &mut variance)?;
    Ok([e[0], shift[0], variance[0]])
}

fn close(ours: [f64; 3], truth: [f64; 3], what: &str) {
    for (ours, truth) in ours.into_iter().zip(truth) {
        let bound = 1e-13 * truth.abs().max(1.0);
        assert!(
            (ours - truth).abs() <= bound,
            "{what}: {ours} instead of {truth}"
        );
    }
}

/// Coefficients that do not move: the law of `linear_transition`.
#[test]
fn a_moving_law_that_stands_still_is_the_constant_one() {
    for dim in 1..=4 {
        let stream = 60 + dim as u64;
        let a = random_matrix(dim, stream);
        let root = random_matrix(dim, stream + 10);
        let (q, alpha) = (&root * root.transpose(), random_matrix(dim, stream + 20));
        let alpha = &alpha.as_slice()[..dim];
        let zeros = || (vec![0.0; dim * dim], vec![0.0; dim], vec![0.0; dim * dim]);
        let (mut still, mut moved) = (zeros(), zeros());
        let (a, q) = (rows(&a), rows(&q));
        linear_transition(
            dim,
            &a,
            alpha,
            &q,
            0.7,
            &mut still.0,
            &mut still.1,
            &mut still.2,
        )
        .expect("moderate rates");
        let all = [a.as_slice(), alpha, q.as_slice()].concat();
        let write = |_: f64, out: &mut [f64]| out.copy_from_slice(&all);
        moving_transition(
            dim,
            2.0,
            0.7,
            write,
            &mut moved.0,
            &mut moved.1,
            &mut moved.2,
        )
        .expect("moderate rates");
        let pairs = [(still.0, moved.0), (still.1, moved.1), (still.2, moved.2)];
        for (still, moved) in pairs {
            let largest = still.iter().fold(1.0_f64, |m, x| m.max(x.abs()));
            for (s, m) in still.iter().zip(&moved) {
                assert!(
                    (s - m).abs() < 1e-13 * largest,
                    "dimension {dim}: {m} instead of {s}"
                );
            }
        }
    }
}

/// Integrals by hand: a Brownian bridge on its way to 1, seasons over whole years, powers of time.
#[test]
fn moving_laws_in_closed_form() {
    use std::f64::consts::TAU;
    // dX = -X/(1 - t) dt + dW from s to s + h: the factor is (1 - s - h)/(1 - s), the variance
    // h (1 - s - h)/(1 - s) (Karatzas and Shreve 1991, section 5.6.B).
    let bridge = |t: f64| [-1.0 / (1.0 - t), 0.0, 1.0];
    for (s, h) in [(0.0, 0.9), (0.5, 0.499), (0.2, 0.1)] {
        let left = (1.0 - s - h) / (1.0 - s);
        close(
            moving(s, h, bridge).unwrap(),
            [left, 0.0, h * left],
            "bridge",
        );
    }
    // dX = k (m cos(2 pi t) - X) dt + s dW over whole years, where every year looks the same:
    // int_0^h exp(-k (h - u)) k m cos(w u) du = m k^2/(k^2 + w^2) (1 - exp(-k h)).
    for (k, h) in [(0.8, 1.0), (0.8, 12.0), (0.3, 60.0), (5.0, 60.0)] {
        let season = |t: f64| [-k, k * 0.7 * (TAU * t).cos(), 0.09];
        let (decay, gain) = ((-k * h).exp(), 0.7 * k * k / (k * k + TAU * TAU));
        let variance = 0.09 * (1.0 - decay * decay) / (2.0 * k);
        close(
            moving(0.0, h, season).unwrap(),
            [decay, gain * (1.0 - decay), variance],
            "season",
        );
    }
    // dX = -2 t X dt + t dW: exp(h^2 - ...) with int_s^T exp(-2 (T^2 - u^2)) u^2 du has no closed form;
    // with volatility sqrt(t) the variance is (1 - exp(-2 (T^2 - s^2)))/4.
    let growing = |t: f64| [-2.0 * t, 2.0 * t, t];
    let (s, end) = (0.5, 2.0_f64);
    let factor = (s * s - end * end).exp();
    close(
        moving(s, end - s, growing).unwrap(),
        [factor, 1.0 - factor, 0.25 * (1.0 - factor * factor)],
        "growing",
    );
    // A jump in the volatility and a kink in the drift.
    let broken = |t: f64| [0.0, (t - 0.3).abs(), if t < 0.7 { 1.0 } else { 4.0 }];
    close(
        moving(0.0, 1.0, broken).unwrap(),
        [1.0, 0.5 * (0.09 + 0.49), 0.7 + 4.0 * 0.3],
        "broken",
    );
}

/// A singularity within the step is refused in words, an overflow too.
#[test]
fn moving_laws_that_do_not_exist() {
    let bridge = |t: f64| [-1.0 / (1.0 - t), 0.0, 1.0];
    let past = moving(0.5, 1.0, bridge).unwrap_err();
    assert_eq!(
        past.to_string(),
        "the coefficients between t = 0.5 and t = 1.5 could not be integrated to rounding accuracy: \
         they are singular there, or decay so fast that the law needs shorter steps"
    );
    assert!(moving(0.0, 1.0, |_| [1e4, 0.0, 1.0]).is_err());
    assert!(moving(0.0, 1.0, |_| [f64::NAN, 0.0, 1.0]).is_err());
}

/// The same draw on no two lanes, and sources in another order than the noise.
#[test]
fn correlated_draws_are_a_triangular_product() {
    for dim in [1, 2, 3, 4, 5, 8, 11, 30] {
        let factor = random_matrix(dim, 40).lower_triangle();
        let draws = random_matrix(dim.max(LANES), 41);
        let draws = draws.view((0, 0), (dim, LANES)).into_owned();
        let sources: Vec<usize> = (0..dim).rev().collect();
        let noise: Vec<Lane> = (0..dim)
            .map(|row| Lane(std::array::from_fn(|lane| draws[(dim - 1 - row, lane)])))
            .collect();
        let expected = &factor * &draws;
        let (mut fused, mut unfused) = (vec![Lane::ZERO; dim], vec![Lane::ZERO; dim]);
        correlate::<Fused>(&rows(&factor), &sources, &noise, &mut fused);
        correlate::<Unfused>(&rows(&factor), &sources, &noise, &mut unfused);
        for out in [fused, unfused] {
            let ours: Vec<f64> = out.iter().flat_map(|lane| lane.0).collect();
            assert!(distance(&ours, &expected) < 1e-14);
        }
    }
}

#[test]
fn runs_of_equal_entries_fill_a_symmetric_matrix() {
    let runs = [(1, 1.0), (1, 0.5), (1, 1.0), (2, 0.5), (1, 1.0)];
    let expected = DMatrix::from_fn(3, 3, |i, j| if i == j { 1.0 } else { 0.5 });
    assert_eq!(symmetric(3, &runs), rows(&expected));
}
