//! Collectors against direct computations over stored paths.

use std::io;

use driftwright_runtime::collect::{
    CoMoments, Covariances, Moments, PathArray, Paths, Quantiles, Stream, Summary,
};
use driftwright_runtime::{Failures, Grid, Run, RunError, simulate};
use statrs::statistics::{Data, Distribution, Max, Min, OrderStatistics};

use crate::fragile::Fragile;
use crate::models::ORCHARD;

fn grid() -> Grid {
    Grid::new(&[0.5, 1.0], None).expect("a grid")
}

fn run(paths: u64) -> Run<'static> {
    Run {
        paths,
        first_path: 100,
        seed: 5,
        ..Run::default()
    }
}

fn paths(count: u64) -> PathArray {
    let outcome = simulate(&ORCHARD, &grid(), &run(count), Paths).expect("a run");
    outcome.output
}

/// All values of a quantity at a time.
fn column(array: &PathArray, time: usize, quantity: usize) -> Vec<f64> {
    let count = array.layout.paths as usize;
    (0..count)
        .map(|path| array.get(path, time, quantity))
        .collect()
}

fn close(a: f64, b: f64, tolerance: f64) {
    assert!((a - b).abs() <= tolerance * b.abs().max(0.01), "{a} {b}");
}

/// Moments against the crate `statrs` and, for the higher ones, their definition.
#[test]
fn moments_agree_with_another_library() {
    for count in [1, 2, 156, 157, 412, 5000] {
        let array = paths(count);
        let moments = simulate(&ORCHARD, &grid(), &run(count), Moments).expect("a run");
        for (time, row) in moments.output.iter().enumerate() {
            for (quantity, summary) in row.iter().enumerate() {
                check_summary(summary, column(&array, time, quantity));
            }
        }
    }
}

fn check_summary(summary: &Summary, values: Vec<f64>) {
    let n = values.len() as f64;
    let mean = values.iter().sum::<f64>() / n;
    let central = |k| values.iter().map(|x| (x - mean).powi(k)).sum::<f64>() / n;
    let (m2, m3, m4) = (central(2), central(3), central(4));
    assert_eq!(summary.count, values.len() as u64);
    if summary.count > 1 {
        close(summary.skewness(), m3 / m2.powf(1.5), 1e-10);
        close(summary.excess_kurtosis(), m4 / (m2 * m2) - 3.0, 1e-10);
        close(
            summary.variance_std_error(),
            ((m4 - m2 * m2) / n).sqrt(),
            1e-8,
        );
    }
    let data = Data::new(values);
    close(summary.mean, data.mean().expect("a mean"), 1e-13);
    assert_eq!((summary.minimum, summary.maximum), (data.min(), data.max()));
    if summary.count > 1 {
        let variance = data.variance().expect("a variance");
        close(summary.variance(), variance, 1e-11);
        close(summary.std_error(), (variance / n).sqrt(), 1e-11);
    } else {
        assert!(summary.variance().is_nan());
    }
}

/// A mean that is large against the spread costs no digits.
#[test]
fn moments_of_shifted_values() {
    let values: Vec<f64> = (0..256).map(|i| 1e9 + f64::from(i % 7)).collect();
    let small: Vec<f64> = values.iter().map(|x| x - 1e9).collect();
    let (shifted, plain) = (Summary::of(&values), Summary::of(&small));
    close(shifted.variance(), plain.variance(), 1e-9);
    close(shifted.skewness(), plain.skewness(), 1e-6);
}

/// Covariances, their standard error and the correlation against their definitions.
#[test]
fn covariances_agree_with_their_definition() {
    for count in [2, 300, 3000] {
        let array = paths(count);
        let pairs = vec![(0, 1), (1, 1)];
        let outcome = simulate(&ORCHARD, &grid(), &run(count), Covariances::new(pairs));
        let rows = outcome.expect("a run").output;
        for (time, row) in rows.iter().enumerate() {
            check_pair(&row[0], &column(&array, time, 0), &column(&array, time, 1));
            check_pair(&row[1], &column(&array, time, 1), &column(&array, time, 1));
        }
    }
}

fn check_pair(pair: &CoMoments, x: &[f64], y: &[f64]) {
    let n = x.len() as f64;
    let mean = |v: &[f64]| v.iter().sum::<f64>() / n;
    let (mx, my) = (mean(x), mean(y));
    let sum =
        |f: &dyn Fn(f64, f64) -> f64| x.iter().zip(y).map(|(a, b)| f(a - mx, b - my)).sum::<f64>();
    let (xx, xy, yy) = (sum(&|u, _| u * u), sum(&|u, v| u * v), sum(&|_, v| v * v));
    close(pair.covariance(), xy / (n - 1.0), 1e-10);
    close(pair.correlation(), xy / (xx * yy).sqrt(), 1e-10);
    let fourth = sum(&|u, v| u * u * v * v);
    let truth = ((fourth / n - (xy / n).powi(2)) / n).max(0.0).sqrt();
    assert!((pair.std_error() - truth).abs() <= 1e-6 * truth + 1e-9 || n == 2.0);
}

/// Quantiles are order statistics with linear interpolation, the same with and without the
/// memory to keep all values.
#[test]
fn quantiles_are_exact_in_any_memory() {
    let probabilities = vec![0.0, 0.01, 0.05, 0.25, 0.5, 0.75, 0.95, 0.99, 1.0];
    for count in [1, 2, 1000, 4001] {
        let array = paths(count);
        for budget in [1 << 30, 1 << 20, 4096, 0] {
            let quantiles = Quantiles::new(probabilities.clone(), budget);
            let settings = run(count);
            let selection = simulate(&ORCHARD, &grid(), &settings, quantiles)
                .expect("a run")
                .output;
            let kept = budget == 1 << 30 || (count as usize) * 4 * 8 <= budget;
            assert_eq!(selection.needs_another_pass(), !kept);
            let table = selection
                .complete(&ORCHARD, &grid(), &settings)
                .expect("a run");
            for (time, quantity) in [(0, 0), (0, 1), (1, 0), (1, 1)] {
                let mut sorted = column(&array, time, quantity);
                sorted.sort_by(f64::total_cmp);
                for (i, p) in probabilities.iter().enumerate() {
                    let place = p * (count - 1) as f64;
                    let low = sorted[place.floor() as usize];
                    let high = sorted[place.ceil() as usize];
                    let value = low + (place - place.floor()) * (high - low);
                    assert_eq!(table.get(time, quantity, i), value);
                }
            }
        }
    }
}

/// The median and the extremes agree with the crate `statrs`, whose other quantiles follow
/// another rule of interpolation.
#[test]
fn median_agrees_with_another_library() {
    let settings = run(1001);
    let quantiles = Quantiles::new(vec![0.5], 1 << 30);
    let selection = simulate(&ORCHARD, &grid(), &settings, quantiles)
        .expect("a run")
        .output;
    let table = selection
        .complete(&ORCHARD, &grid(), &settings)
        .expect("a run");
    let mut data = Data::new(column(&paths(1001), 1, 0));
    assert_eq!(table.get(1, 0, 0), data.median());
}

/// Values that are not numbers stand at the upper end, and infinite ones at theirs.
#[test]
fn quantiles_of_failed_paths() {
    let settings = run(2000);
    for budget in [1 << 30, 10_000] {
        let quantiles = Quantiles::new(vec![0.0, 0.3, 1.0], budget);
        let outcome = simulate(&Fragile, &grid(), &settings, quantiles).expect("a run");
        assert!(outcome.failures.non_finite > 100);
        let table = outcome
            .output
            .complete(&Fragile, &grid(), &settings)
            .expect("a run");
        assert!(table.get(1, 0, 0).is_finite() && table.get(1, 0, 1).is_finite());
        assert!(table.get(1, 0, 2).is_nan());
    }
}

/// The stream delivers all values in the order of the paths, on any number of threads.
#[test]
fn streams_are_in_order() {
    let stored = paths(3000).values;
    for threads in [1, 4] {
        let mut written = Vec::new();
        let mut next = 100;
        let write = |first_path: u64, values: &[f64]| -> io::Result<()> {
            assert_eq!(first_path, next);
            next += values.len() as u64 / 4;
            written.extend_from_slice(values);
            Ok(())
        };
        let settings = Run {
            threads,
            ..run(3000)
        };
        simulate(&ORCHARD, &grid(), &settings, Stream::new(write))
            .map(|_| ())
            .expect("a run");
        assert_eq!(written, stored);
    }
}

/// A full disk ends the run with its error.
#[test]
fn a_writer_that_fails_ends_the_run() {
    for threads in [1, 4] {
        let mut calls = 0;
        let write = |_: u64, _: &[f64]| {
            calls += 1;
            match calls {
                1..=3 => Ok(()),
                _ => Err(io::Error::other("no space left")),
            }
        };
        let settings = Run {
            threads,
            ..run(100_000)
        };
        let outcome = simulate(&ORCHARD, &grid(), &settings, Stream::new(write)).map(|_| ());
        let error = outcome.expect_err("the writer failed");
        assert!(matches!(error, RunError::Output(_)));
        assert!(error.to_string().contains("no space left"));
        assert_eq!(calls, 4);
    }
}

/// A collector that panics on one thread does not leave the others waiting.
#[test]
fn a_panic_reaches_the_caller() {
    let write = |first_path: u64, _: &[f64]| -> io::Result<()> {
        assert!(first_path < 5000, "broken writer");
        Ok(())
    };
    let settings = Run {
        threads: 4,
        ..run(1_000_000)
    };
    let attempt = std::panic::AssertUnwindSafe(|| {
        simulate(&ORCHARD, &grid(), &settings, Stream::new(write)).map(|_| ())
    });
    assert!(std::panic::catch_unwind(attempt).is_err());
}

/// Pairs and options collect what their members would.
#[test]
fn collectors_combine() {
    let alone = simulate(&ORCHARD, &grid(), &run(700), Moments).expect("a run");
    let none: Option<Paths> = None;
    let both = (Moments, (Some(Paths), none));
    let together = simulate(&ORCHARD, &grid(), &run(700), both).expect("a run");
    assert_eq!(together.output.0, alone.output);
    assert_eq!(together.output.1.0.expect("stored"), paths(700));
    assert!(together.output.1.1.is_none());
    assert_eq!(together.failures, Failures::default());
}

/// Geometric Brownian motion: mean and variance of the price and of its logarithm against
/// the lognormal law. Eight statistics at a family error of 0.001: |z| < 3.85; 400,000
/// paths see a variance of the logarithm wrong by 1 % at 4.5 standard errors.
#[test]
fn moments_of_the_model() {
    let settings = Run {
        paths: 400_000,
        seed: 3,
        ..Run::default()
    };
    let outcome = simulate(&ORCHARD, &grid(), &settings, Moments).expect("a run");
    let errors = |sigma: f64| -> Vec<f64> {
        let (start, mu) = (ORCHARD.start, ORCHARD.mu);
        let law = |t: f64| {
            let (mean, spread) = (start * (mu * t).exp(), sigma * sigma * t);
            let log = start.ln() + (mu - 0.5 * sigma * sigma) * t;
            [(mean, mean * mean * spread.exp_m1()), (log, spread)]
        };
        let rows = outcome.output.iter().zip([0.5, 1.0]);
        let pairs = rows.flat_map(|(row, t)| row.iter().zip(law(t)));
        pairs
            .flat_map(|(summary, (mean, variance))| {
                [
                    (summary.mean - mean) / summary.std_error(),
                    (summary.variance() - variance) / summary.variance_std_error(),
                ]
            })
            .collect()
    };
    let worst = |z: Vec<f64>| z.into_iter().map(f64::abs).fold(0.0, f64::max);
    assert!(worst(errors(ORCHARD.sigma)) < 3.85);
    // The twin: a volatility off by one per cent fails.
    assert!(worst(errors(ORCHARD.sigma * 1.01)) > 3.85);
}
