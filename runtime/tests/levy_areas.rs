//! Levy areas given the increments: their characteristic function (Levy 1951), their covariances (Wiktorsson 2001), their
//! addresses and their frozen bits.

use std::f64::consts::PI;

use driftwright_runtime::random::{Draws, area_terms};
use driftwright_runtime::{ArithmeticClass, Generator, LANES, Lane, STREAM_VERSION, source_id};

const CLASSES: [ArithmeticClass; 2] = [ArithmeticClass::Fused, ArithmeticClass::Unfused];

/// Any of a family of some hundred two-sided tests stays below this with probability 0.999.
const THRESHOLD: f64 = 4.6;

const GOLDEN: [f64; 4] = [
    0.14044030243428487,
    0.8295103995748703,
    -1.464678287664519,
    -0.5051697684989379,
];

/// The areas (1, 2), (1, 3), (2, 3) of three drivers with the same increments on all paths.
fn sample(
    increments: [f64; 3],
    length: f64,
    paths: usize,
    class: ArithmeticClass,
    generator: Generator,
) -> [Vec<f64>; 3] {
    let drivers = ["area:a", "area:b", "area:c"].map(source_id);
    let drivers = [0, 1, 2].map(|p| (p, drivers[p]));
    let remainder = |p, q| (p, q, source_id(&format!("area:{p}:{q}")));
    let pairs = [remainder(0, 1), remainder(0, 2), remainder(1, 2)];
    let noise = increments.map(Lane::splat);
    let mut found = [const { Vec::new() }; 3];
    for first_path in (0..paths as u64).step_by(LANES) {
        let draws = Draws::new(11, generator, class, 4, first_path);
        let mut out = [Lane::ZERO; 9];
        draws.areas(length, &drivers, &pairs, &noise, &mut out);
        for (all, lane) in found.iter_mut().zip(&out) {
            all.extend_from_slice(&lane.0);
        }
    }
    found
}

/// Standard errors between a mean over paths and a value.
fn z(sample: impl Iterator<Item = f64> + Clone, value: f64) -> f64 {
    let n = sample.clone().count() as f64;
    let mean = sample.clone().sum::<f64>() / n;
    let variance = sample.map(|x| (x - mean).powi(2)).sum::<f64>() / n;
    (mean - value) / (variance / n).sqrt()
}

/// The characteristic function at `l` of the area of two drivers with `square` the squared length of their increments
/// (Levy 1951): `x/sinh(x) exp(-(x coth(x) - 1) square/2)` with `x = l/2`.
fn law(l: f64, square: f64) -> f64 {
    let x = l / 2.0;
    x / x.sinh() * (-(x / x.tanh() - 1.0) * square / 2.0).exp()
}

/// That of the series with a normal remainder: each term has, given the increments, the characteristic function of
/// a product of a normal with an independent noncentral chi variable.
fn law_of_series(l: f64, square: f64, terms: u32) -> f64 {
    let mut left = PI * PI / 6.0;
    let mut value = 1.0;
    for k in 1..=terms {
        let m = (l / (2.0 * PI * f64::from(k))).powi(2);
        value *= (-m * square / (1.0 + m)).exp() / (1.0 + m);
        left -= f64::from(k).powi(-2);
    }
    value * (-(l / (2.0 * PI)).powi(2) * left * (1.0 + square)).exp()
}

#[test]
fn the_series_tends_to_the_law() {
    for (l, square) in [(1.0, 0.0), (3.0, 1.7), (8.0, 0.4)] {
        let (series, law) = (law_of_series(l, square, 4000), law(l, square));
        assert!((series - law).abs() < 1e-9, "{l} {square}: {series} {law}");
    }
}

/// Areas of short steps against Levy's law, of long ones against the series they stop at.
#[test]
fn areas_have_their_law_given_the_increments() {
    let settings = [
        (
            [0.0, 0.0, 0.0],
            ArithmeticClass::Fused,
            Generator::default(),
        ),
        (
            [0.8, -0.5, 1.9],
            ArithmeticClass::Unfused,
            Generator::default(),
        ),
        (
            [-1.6, 0.9, 0.2],
            ArithmeticClass::Fused,
            Generator::Philox4x32,
        ),
    ];
    let pairs = [(0, 1), (0, 2), (1, 2)];
    for (x, class, generator) in settings {
        for length in [1.0, 0.01, 1e-5] {
            let areas = sample(x, length, 60_000, class, generator);
            for (&(p, q), areas) in pairs.iter().zip(&areas) {
                for l in [1.0, 3.0, 6.0, 10.0] {
                    let square = x[p] * x[p] + x[q] * x[q];
                    let terms = area_terms(3, length);
                    let value = match length {
                        1e-5 => law(l, square),
                        _ => law_of_series(l, square, terms),
                    };
                    let z = z(areas.iter().map(|a| (l * a).cos()), value);
                    assert!(z.abs() < THRESHOLD, "{x:?} {length} {l}: {z}");
                }
            }
        }
    }
}

/// The twin: one term is seen to be too few for Levy's law, and a law that forgets the increments is refused.
#[test]
fn another_law_is_refused() {
    let (class, generator) = (ArithmeticClass::Fused, Generator::default());
    let [areas, ..] = sample([0.0; 3], 1.0, 400_000, class, generator);
    let far = z(areas.iter().map(|a| (6.0 * a).cos()), law(6.0, 0.0));
    assert!(far.abs() > THRESHOLD, "{far}");
    let [areas, ..] = sample([0.8, -0.5, 0.0], 1e-5, 60_000, class, generator);
    let far = z(areas.iter().map(|a| (3.0 * a).cos()), law(3.0, 0.0));
    assert!(far.abs() > THRESHOLD, "{far}");
}

/// `Cov(A_pq, A_rs) = (d_pr C_qs - d_ps C_qr - d_qr C_ps + d_qs C_pr)/24` with `C = d + 2 x x'` given the increments `x`
/// (Wiktorsson 2001, section 4), however few terms there are.
#[test]
fn covariances_given_the_increments() {
    let x = [0.8, -1.5, 0.4];
    let same = |p: usize, q: usize| if p == q { 1.0 } else { 0.0 };
    let c = |p: usize, q: usize| same(p, q) + 2.0 * x[p] * x[q];
    let pairs = [(0, 1), (0, 2), (1, 2)];
    for (length, class) in [1.0, 1e-4].into_iter().zip(CLASSES) {
        let areas = sample(x, length, 200_000, class, Generator::default());
        for (i, (p, q)) in pairs.into_iter().enumerate() {
            for (j, (r, s)) in pairs.into_iter().enumerate().take(i + 1) {
                let value = same(p, r) * c(q, s) - same(p, s) * c(q, r) - same(q, r) * c(p, s)
                    + same(q, s) * c(p, r);
                let products = areas[i].iter().zip(&areas[j]).map(|(a, b)| a * b);
                let z = z(products, value / 24.0);
                assert!(z.abs() < THRESHOLD, "{length} {p}{q} {r}{s}: {z}");
            }
        }
    }
    // The twin: areas that are independent of one another given the increments.
    let areas = sample(x, 1.0, 200_000, CLASSES[0], Generator::default());
    let products = areas[0].iter().zip(&areas[1]).map(|(a, b)| a * b);
    assert!(z(products, 0.0).abs() > THRESHOLD);
}

#[test]
fn lengths_that_are_no_lengths_end_at_a_bound() {
    assert_eq!(area_terms(2, f64::INFINITY), 1);
    assert_eq!(area_terms(2, f64::NAN), 1);
    assert_eq!(area_terms(2, 0.0), u32::from(u16::MAX));
}

/// A path has the same areas in any block and whatever the other paths' increments are.
#[test]
fn an_area_hangs_on_its_own_path() {
    let drivers = [(0, source_id("area:a")), (1, source_id("area:b"))];
    let pairs = [(0, 1, source_id("area:a:b"))];
    let areas = |first_path: u64, noise: &[Lane; 2]| {
        let class = ArithmeticClass::Unfused;
        let draws = Draws::new(9, Generator::default(), class, 7, first_path);
        let mut out = [Lane::ZERO; 5];
        draws.areas(0.02, &drivers, &pairs, noise, &mut out);
        out[0]
    };
    let same = [Lane::splat(0.4), Lane::splat(-1.0)];
    let mut mixed = [Lane::splat(3.0), Lane::splat(0.2)];
    (mixed[0][77], mixed[1][77]) = (0.4, -1.0);
    assert_eq!(
        areas(512, &same)[77].to_bits(),
        areas(512, &mixed)[77].to_bits()
    );
    assert_eq!(
        areas(512, &same)[80].to_bits(),
        areas(592, &same)[0].to_bits()
    );
}

/// Frozen: a change here is a change of `STREAM_VERSION`.
#[test]
fn golden_areas() {
    assert_eq!(STREAM_VERSION, 1);
    let [first, _, third] = sample(
        [0.5, -1.25, 2.0],
        0.01,
        LANES,
        ArithmeticClass::Unfused,
        Generator::Threefry2x64,
    );
    assert_eq!([first[0], first[255], third[0], third[100]], GOLDEN);
}
