//! Gamma and Poisson numbers: their laws against another library, their addresses, their frozen bits.

use driftwright_runtime::random::Draws;
use driftwright_runtime::{ArithmeticClass, Generator, LANES, Lane, STREAM_VERSION, source_id};
use statrs::distribution::{ContinuousCDF, Discrete, Gamma, Normal};
use statrs::distribution::{DiscreteCDF, Poisson};

/// Paths behind a test of a law.
const PATHS: usize = 100_000;

/// Each Kolmogorov-Smirnov statistic times the root of the sample size stays below this with
/// probability 1 - 1e-6 (Kolmogorov 1933: `2 exp(-2 x^2)`).
const KOLMOGOROV: f64 = 2.69;

const GOLDEN_GAMMAS: [f64; 4] = [
    0.2213612150604739,
    2.0230556750429285,
    11.1564837779716,
    403.44524091488563,
];
const GOLDEN_COUNTS: [f64; 4] = [0.0, 3.0, 8.0, 367.0];

const CLASSES: [ArithmeticClass; 2] = [ArithmeticClass::Fused, ArithmeticClass::Unfused];

/// The draws of many blocks, one parameter for all.
fn sample(
    draw: impl Fn(&Draws, &Lane, &mut Lane),
    parameter: f64,
    class: ArithmeticClass,
    generator: Generator,
) -> Vec<f64> {
    let parameter = Lane::splat(parameter);
    let mut all = Vec::new();
    for first_path in (0..PATHS as u64).step_by(LANES) {
        let draws = Draws::new(5, generator, class, 3, first_path);
        let mut out = Lane::ZERO;
        draw(&draws, &parameter, &mut out);
        all.extend_from_slice(&out.0);
    }
    all
}

fn gammas(shape: f64, class: ArithmeticClass, generator: Generator) -> Vec<f64> {
    let draw = |d: &Draws, p: &Lane, out: &mut Lane| d.gamma(source_id("gamma"), p, out);
    sample(draw, shape, class, generator)
}

fn counts(mean: f64, class: ArithmeticClass, generator: Generator) -> Vec<f64> {
    let draw = |d: &Draws, p: &Lane, out: &mut Lane| d.poisson(source_id("poisson"), p, out);
    sample(draw, mean, class, generator)
}

/// `sqrt(n) D` of a sample against a distribution function.
fn kolmogorov(mut sample: Vec<f64>, cdf: impl Fn(f64) -> f64) -> f64 {
    sample.sort_by(f64::total_cmp);
    let n = sample.len() as f64;
    let gap = |(i, x): (usize, &f64)| {
        let p = cdf(*x);
        (p - i as f64 / n).max((i as f64 + 1.0) / n - p)
    };
    n.sqrt() * sample.iter().enumerate().map(gap).fold(0.0, f64::max)
}

#[test]
fn gamma_numbers_have_their_law() {
    for class in CLASSES {
        for shape in [0.02, 0.3, 0.999, 1.0, 1.7, 6.5, 80.0, 4e4] {
            let law = Gamma::new(shape, 1.0).unwrap();
            let statistic = kolmogorov(gammas(shape, class, Generator::default()), |x| law.cdf(x));
            assert!(statistic < KOLMOGOROV, "{class}, {shape}: {statistic}");
        }
    }
    let law = Gamma::new(0.7, 1.0).unwrap();
    let philox = gammas(0.7, ArithmeticClass::Fused, Generator::Philox4x32);
    assert!(kolmogorov(philox, |x| law.cdf(x)) < KOLMOGOROV);
}

/// A large shape is nearly normal, with skewness `2/sqrt(shape)` that the statistic cannot see.
#[test]
fn gamma_numbers_of_large_shape_keep_their_spread() {
    let shape: f64 = 1e13;
    let sample = gammas(shape, ArithmeticClass::Fused, Generator::default());
    let scaled = sample.iter().map(|g| (g - shape) / shape.sqrt()).collect();
    let law = Normal::standard();
    assert!(kolmogorov(scaled, |x| law.cdf(x)) < KOLMOGOROV);
}

/// The twin: a shape off by three hundredths is seen.
#[test]
fn a_wrong_shape_is_seen() {
    let law = Gamma::new(1.751, 1.0).unwrap();
    let sample = gammas(1.7, ArithmeticClass::Fused, Generator::default());
    assert!(kolmogorov(sample, |x| law.cdf(x)) > KOLMOGOROV);
}

/// The chi-square statistic of counts against their law as a normal deviate (Wilson and Hilferty 1931);
/// cells with fewer than ten expected are pooled.
fn deviate(sample: &[f64], law: &Poisson) -> f64 {
    let n = sample.len() as f64;
    let expected = |k: u64| n * law.pmf(k);
    let largest = (0..).find(|&k| n * law.sf(k) < 10.0).unwrap();
    let smallest = (0..).find(|&k| n * law.cdf(k) >= 10.0).unwrap();
    let mut seen = vec![0.0; (largest - smallest + 2) as usize];
    for x in sample {
        let cell = (*x as u64).clamp(smallest, largest + 1) - smallest;
        seen[cell as usize] += 1.0;
    }
    let mut statistic = 0.0;
    let mut cells = 0.0;
    let (mut pooled, mut of) = (0.0, 0.0);
    for (i, observed) in seen.iter().enumerate() {
        let k = smallest + i as u64;
        pooled += observed;
        of += match i {
            0 => n * law.cdf(smallest),
            _ if k == largest + 1 => n * law.sf(largest),
            _ => expected(k),
        };
        if of >= 10.0 {
            statistic += (pooled - of) * (pooled - of) / of;
            cells += 1.0;
            (pooled, of) = (0.0, 0.0);
        }
    }
    let freedom: f64 = cells - 1.0;
    let cube = 2.0 / (9.0 * freedom);
    ((statistic / freedom).cbrt() - (1.0 - cube)) / cube.sqrt()
}

#[test]
fn poisson_numbers_have_their_law() {
    for class in CLASSES {
        for mean in [0.05, 0.9, 4.0, 9.99, 10.0, 23.0, 180.0, 5e3] {
            let law = Poisson::new(mean).unwrap();
            let z = deviate(&counts(mean, class, Generator::default()), &law);
            // Two-sided at 1e-6.
            assert!(z.abs() < 4.9, "{class}, {mean}: {z}");
        }
    }
    let law = Poisson::new(14.0).unwrap();
    let philox = counts(14.0, ArithmeticClass::Fused, Generator::Philox4x32);
    assert!(deviate(&philox, &law).abs() < 4.9);
}

#[test]
fn poisson_numbers_of_large_mean_keep_their_spread() {
    let mean: f64 = 1e12;
    let sample = counts(mean, ArithmeticClass::Fused, Generator::default());
    let scaled = sample.iter().map(|n| (n - mean) / mean.sqrt()).collect();
    let law = Normal::standard();
    assert!(kolmogorov(scaled, |x| law.cdf(x)) < KOLMOGOROV);
}

/// The twin: means off by a hundredth are seen, on either side of the switch.
#[test]
fn a_wrong_mean_is_seen() {
    for (mean, wrong) in [(4.0, 4.04), (23.0, 23.23)] {
        let sample = counts(mean, ArithmeticClass::Fused, Generator::default());
        assert!(deviate(&sample, &Poisson::new(wrong).unwrap()) > 4.9);
    }
}

#[test]
fn parameters_at_the_edge_need_no_draw() {
    let cases = [0.0, f64::INFINITY, -1.0, f64::NAN, f64::MIN_POSITIVE];
    let mut parameter = Lane::splat(1.0);
    parameter[..cases.len()].copy_from_slice(&cases);
    let draws = Draws::new(1, Generator::default(), ArithmeticClass::Fused, 0, 0);
    let (mut gamma, mut count) = (Lane::ZERO, Lane::ZERO);
    draws.gamma(source_id("a"), &parameter, &mut gamma);
    draws.poisson(source_id("b"), &parameter, &mut count);
    for lane in [gamma, count] {
        assert_eq!(lane[0], 0.0);
        assert_eq!(lane[1], f64::INFINITY);
        assert!(lane[2].is_nan() && lane[3].is_nan());
        assert_eq!(lane[4], 0.0);
    }
}

/// Draws of stream version 1, frozen: a change here is a change of `STREAM_VERSION`. Shapes and means on
/// either side of each switch between algorithms.
#[test]
fn golden_draws() {
    assert_eq!(STREAM_VERSION, 1);
    let draws = Draws::new(
        20_261_201,
        Generator::Threefry2x64,
        ArithmeticClass::Unfused,
        250,
        512,
    );
    let mut parameter = Lane::ZERO;
    parameter[..4].copy_from_slice(&[0.4, 3.5, 12.0, 400.0]);
    let (mut gamma, mut count) = (Lane::ZERO, Lane::ZERO);
    draws.gamma(source_id("law:x:gamma"), &parameter, &mut gamma);
    draws.poisson(source_id("law:x:poisson"), &parameter, &mut count);
    assert_eq!(gamma[..4], GOLDEN_GAMMAS);
    assert_eq!(count[..4], GOLDEN_COUNTS);
}

/// A draw hangs on its own address and parameter, not on its neighbours.
#[test]
fn a_draw_does_not_hang_on_the_other_paths() {
    let class = ArithmeticClass::Unfused;
    let draws = Draws::new(9, Generator::default(), class, 41, 512);
    let same = Lane::splat(0.4);
    let mut mixed = Lane::splat(30.0);
    mixed[77] = 0.4;
    let (mut a, mut b) = (Lane::ZERO, Lane::ZERO);
    for source in [source_id("x"), source_id("y")] {
        draws.gamma(source, &same, &mut a);
        draws.gamma(source, &mixed, &mut b);
        assert_eq!(a[77].to_bits(), b[77].to_bits());
        draws.poisson(source, &same, &mut a);
        draws.poisson(source, &mixed, &mut b);
        assert_eq!(a[77].to_bits(), b[77].to_bits());
    }
    let next = Draws::new(9, Generator::default(), class, 42, 512);
    draws.gamma(source_id("x"), &same, &mut a);
    next.gamma(source_id("x"), &same, &mut b);
    assert!(a.iter().zip(b.iter()).all(|(a, b)| a != b));
}
