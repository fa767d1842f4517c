//! Poisson probabilities and the incomplete gamma function.

use crate::arith::Unfused;
use crate::math::{exp, ln};

/// `mean^k e^-mean/Gamma(k + 1)`, also for `k` that are no integers.
pub(super) fn poisson(k: f64, mean: f64) -> f64 {
    if mean == 0.0 {
        return if k == 0.0 { 1.0 } else { 0.0 };
    }
    exp::<Unfused>(k * ln::<Unfused>(mean) - mean - libm::lgamma(k + 1.0))
}

/// The regularised lower incomplete gamma function `P(shape, x)`: its series below `shape + 1`, above it the
/// continued fraction of its complement (Abramowitz and Stegun 1964, 6.5.29 and 6.5.31).
pub(super) fn incomplete_gamma(shape: f64, x: f64) -> f64 {
    if shape == 0.0 {
        return 1.0;
    }
    if x == 0.0 {
        return 0.0;
    }
    let density = poisson(shape, x);
    if x < shape + 1.0 {
        let (mut term, mut sum, mut n) = (1.0, 1.0, shape);
        while term > sum * 1e-17 {
            n += 1.0;
            term *= x / n;
            sum += term;
        }
        return density * sum;
    }
    1.0 - density * shape / x * complement(shape, x)
}

/// `x^(1-a) e^x Gamma(a, x)` by its continued fraction, evaluated as Lentz (1976) does.
fn complement(a: f64, x: f64) -> f64 {
    let tiny = f64::MIN_POSITIVE / f64::EPSILON;
    let mut b = x + 1.0 - a;
    let mut c = 1.0 / tiny;
    let mut d = 1.0 / b;
    let mut value = d;
    for i in 1..100_000 {
        let i = f64::from(i);
        let numerator = -i * (i - a);
        b += 2.0;
        let denominator = numerator * d + b;
        d = 1.0
            / if denominator.abs() < tiny {
                tiny
            } else {
                denominator
            };
        c = b + numerator / c;
        c = if c.abs() < tiny { tiny } else { c };
        value *= d * c;
        if (d * c - 1.0).abs() < 1e-16 {
            break;
        }
    }
    value * x
}
