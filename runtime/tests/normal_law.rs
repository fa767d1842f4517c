//! The normal law: its functions against tables, and the generated normals against the law.

use crate::reference::cases;
use driftwright_runtime::random::{Address, Generator, normal_pair};
use driftwright_runtime::{Arith, Fused, Unfused, math, source_id};
use statrs::distribution::{ContinuousCDF, Normal};

/// Table 26.1 of M. Abramowitz and I. A. Stegun (eds), Handbook of Mathematical Functions
/// (1964), its quantile table, and the test values of M. J. Wichura's algorithm AS 241 (1988),
/// all recomputed with 40 digits.
#[test]
fn functions_agree_with_tables() {
    functions_agree::<Fused>();
    functions_agree::<Unfused>();
}

fn functions_agree<A: Arith>() {
    let mut seen = 0;
    for check in cases().iter().flat_map(|case| &case.checks) {
        let Some(at) = check.at.as_ref().and_then(toml::Value::as_float) else {
            continue;
        };
        let value = match check.quantity.as_str() {
            "normal_cdf" => math::normal_cdf::<A>(at),
            "normal_pdf" => math::normal_pdf::<A>(at),
            "normal_quantile" => math::normal_quantile::<A>(at),
            "normal_upper_quantile" => -math::normal_quantile::<A>(at),
            _ => continue,
        };
        let error = (value - check.value).abs();
        let bound = check.rel_tol * check.value.abs();
        assert!(
            error <= bound,
            "{} at {at}: {value}, not {}",
            check.quantity,
            check.value
        );
        seen += 1;
    }
    assert!(seen >= 50, "only {seen} checks");
}

/// The error function against the crate `statrs`, an independent implementation.
#[test]
fn distribution_function_agrees_with_another_library() {
    let law = Normal::standard();
    for i in -370..=370 {
        let x = f64::from(i) / 10.0;
        let (ours, theirs) = (math::normal_cdf::<Fused>(x), law.cdf(x));
        assert!(
            (ours - theirs).abs() <= 1e-10 * theirs,
            "{x}: {ours} {theirs}"
        );
    }
}

/// Normals of `paths` paths at both steps of a block.
fn normals(generator: Generator, paths: u64) -> impl Iterator<Item = f64> {
    let address = Address {
        seed: 1,
        source: source_id("W"),
        block: 0,
        attempt: 0,
    };
    (0..paths).flat_map(move |path| normal_pair::<Fused>(generator.words(&address, path)))
}

/// The largest standardised error of the sample means of `Z^k`, k = 1 to 8, with
/// `Var[Z^k] = (2k-1)!! - ((k-1)!!)^2` for even k and `(2k-1)!!` for odd k.
fn worst_moment(sample: impl Iterator<Item = f64>) -> f64 {
    let mut sums = [0.0; 8];
    let mut count = 0.0;
    for z in sample {
        let mut power = 1.0;
        for sum in &mut sums {
            power *= z;
            *sum += power;
        }
        count += 1.0;
    }
    let means = [0.0, 1.0, 0.0, 3.0, 0.0, 15.0, 0.0, 105.0];
    let variances = [
        1.0,
        2.0,
        15.0,
        96.0,
        945.0,
        10_170.0,
        135_135.0,
        2_016_000.0_f64,
    ];
    let error = |k: usize| (sums[k] / count - means[k]) / (variances[k] / count).sqrt();
    (0..8).map(|k| error(k).abs()).fold(0.0, f64::max)
}

/// Sixteen statistics in this test at a family error of 0.001: |z| < 4.0. Two million normals
/// see a variance wrong by 1 % at 10 standard errors. The reference values of the
/// moments are in `A.toml` too.
#[test]
fn moments_of_the_normals() {
    let known = cases();
    let moments = known.iter().find(|case| case.kind == "normal_moments");
    let check = |name: &str| {
        let checks = &moments.expect("the case is in the file").checks;
        let check = checks.iter().find(|check| check.quantity == name);
        check.expect("the moment is in the file").value
    };
    assert_eq!(check("E[Z^8]"), 105.0);
    assert_eq!(check("Var[Z^8]"), 2_016_000.0);
    for generator in [Generator::Threefry2x64, Generator::Philox4x32] {
        let worst = worst_moment(normals(generator, 1_000_000));
        assert!(worst < 4.0, "{generator}: {worst}");
    }
    // The twin: normals with a variance off by one per cent fail.
    let wide = normals(Generator::Threefry2x64, 1_000_000).map(|z| z * 1.005);
    assert!(worst_moment(wide) > 4.0);
}

/// `sqrt(n) D_n` of Kolmogorov and Smirnov.
fn kolmogorov(mut sample: Vec<f64>) -> f64 {
    sample.sort_unstable_by(f64::total_cmp);
    let n = sample.len() as f64;
    let gap = |(i, &z): (usize, &f64)| {
        let p = math::normal_cdf::<Unfused>(z);
        (p - i as f64 / n).abs().max((p - (i + 1) as f64 / n).abs())
    };
    sample.iter().enumerate().map(gap).fold(0.0, f64::max) * n.sqrt()
}

/// The whole law, by the test of Kolmogorov and Smirnov: `sqrt(n) D_n` exceeds 2.23 with
/// probability 1e-4 (N. Smirnov, Annals of Mathematical Statistics 19, 1948).
#[test]
fn law_of_the_normals() {
    for generator in [Generator::Threefry2x64, Generator::Philox4x32] {
        let statistic = kolmogorov(normals(generator, 500_000).collect());
        assert!(statistic < 2.23, "{generator}: {statistic}");
    }
    // The twin: a shift by one per cent of the standard deviation fails.
    let shifted = normals(Generator::Threefry2x64, 500_000).map(|z| z + 0.01);
    assert!(kolmogorov(shifted.collect()) > 2.23);
}

/// Independence: correlations of neighbouring steps, paths, sources, seeds and attempts,
/// of the normals and of their squares. Twelve statistics at a family error of 0.001:
/// |z| < 4.0.
#[test]
fn neighbouring_addresses_are_independent() {
    let paths = 500_000;
    let base = Address {
        seed: 1,
        source: source_id("W"),
        block: 0,
        attempt: 0,
    };
    let draw = |address: &Address, path: u64| {
        normal_pair::<Fused>(Generator::Threefry2x64.words(address, path))
    };
    let others = [
        Address { block: 1, ..base },
        Address {
            source: source_id("B"),
            ..base
        },
        Address { seed: 2, ..base },
        Address { attempt: 1, ..base },
    ];
    let correlate = |partner: &dyn Fn(u64) -> f64| {
        let (mut linear, mut square) = (0.0, 0.0);
        for path in 0..paths {
            let (x, y) = (draw(&base, path)[0], partner(path));
            linear += x * y;
            square += (x * x - 1.0) * (y * y - 1.0);
        }
        let scale = (paths as f64).sqrt();
        [linear / scale, square / (2.0 * scale)]
    };
    let mut statistics = vec![
        correlate(&|path| draw(&base, path)[1]),
        correlate(&|path| draw(&base, path + 1)[0]),
    ];
    statistics.extend(
        others
            .iter()
            .map(|other| correlate(&|path| draw(other, path)[0])),
    );
    for statistic in statistics.concat() {
        assert!(statistic.abs() < 4.0, "{statistic}");
    }
    // The twin: a shared part of one per cent fails.
    let shared = correlate(&|path| 0.01 * draw(&base, path)[0] + draw(&base, path)[1]);
    assert!(shared[0].abs() > 4.0, "{shared:?}");
}
