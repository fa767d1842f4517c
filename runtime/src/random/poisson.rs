//! Poisson numbers.

use super::draws::Rejection;
use super::uniform;
use crate::arith::Arith;
use crate::math;

/// From this mean on the rejection method is used; below it the distribution function is inverted.
const LARGE: f64 = 10.0;

/// The hat of the paper is a continuous fit, which single probabilities exceed by up to 0.6 % below mean
/// 500; what lies above a hat is never drawn. The tests hold the raised one against the law.
const MARGIN: f64 = 1.01;

/// The squeeze holds at this distance from the ends of the uniform number on; the paper has 0.07, where
/// the step from one count to the next can take the ratio below it.
const WITHIN: f64 = 0.1;

/// The Poisson law, its mean the parameter.
///
/// From mean 10 on by transformed rejection with squeeze: W. Hoermann, "The transformed rejection method
/// for generating Poisson random variables", Insurance: Mathematics and Economics 12 (1993), algorithm
/// PTRS; constants recalled from the paper, the hat raised by `MARGIN`. Below by adding up probabilities
/// until they exceed a uniform number.
pub(super) struct Poisson;

impl Rejection for Poisson {
    #[inline(always)]
    fn attempt<A: Arith>(mean: f64, words: [u64; 4]) -> (f64, bool) {
        if mean < LARGE {
            (inverted::<A>(mean, uniform(words[0])), true)
        } else {
            transformed::<A>(mean, uniform(words[0]), uniform(words[1]))
        }
    }
}

/// The least `k` with `P(N <= k) >= u`.
#[inline(always)]
fn inverted<A: Arith>(mean: f64, u: f64) -> f64 {
    // At mean 10 the probability beyond is below 1e-60, and rounding of the sum must not go on for ever.
    const LAST: f64 = 100.0;
    let mut probability = math::exp::<A>(-mean);
    let (mut sum, mut k) = (probability, 0.0);
    while u > sum && k < LAST {
        k += 1.0;
        probability *= mean / k;
        sum += probability;
    }
    k
}

/// One attempt of PTRS.
#[inline(always)]
fn transformed<A: Arith>(mean: f64, first: f64, v: f64) -> (f64, bool) {
    let hat = Hat::new(mean);
    let u = first - 0.5;
    let us = 0.5 - u.abs();
    let k = (A::mul_add(2.0 * hat.a / us + hat.b, u, mean) + 0.43).floor();
    if us >= WITHIN && v <= hat.squeeze {
        return (k, true);
    }
    if k < 0.0 || (us < 0.013 && v > us) {
        return (k, false);
    }
    let density = v * hat.inverse_alpha / (hat.a / (us * us) + hat.b);
    let accepted = math::ln_positive::<A>(density) <= log_probability::<A>(k, mean);
    (k, accepted)
}

/// The constants of PTRS for a mean.
struct Hat {
    a: f64,
    b: f64,
    inverse_alpha: f64,
    squeeze: f64,
}

impl Hat {
    #[inline(always)]
    fn new(mean: f64) -> Hat {
        let b = 0.931 + 2.53 * mean.sqrt();
        Hat {
            a: -0.059 + 0.02483 * b,
            b,
            inverse_alpha: (1.1239 + 1.1328 / (b - 3.4)) * MARGIN,
            squeeze: (0.9277 - 3.6224 / (b - 2.0)) / MARGIN,
        }
    }
}

/// `ln P(N = k)` without cancellation at large means: C. Loader, "Fast and accurate computation of
/// binomial probabilities" (2000), whose Poisson case is `-D(k, mean) - ln(2 pi k)/2` less the error of
/// Stirling's formula.
#[inline(always)]
fn log_probability<A: Arith>(k: f64, mean: f64) -> f64 {
    const TWO_PI: f64 = 2.0 * std::f64::consts::PI;
    if k < 1.0 {
        return -mean;
    }
    let stirling = stirling_error::<A>(k) + deviance::<A>(k, mean);
    A::mul_add(-0.5, math::ln_positive::<A>(TWO_PI * k), -stirling)
}

/// `ln k! - ((k + 1/2) ln k - k + ln(2 pi)/2)` for `k >= 1`.
#[inline(always)]
fn stirling_error<A: Arith>(k: f64) -> f64 {
    // The series is shifted up, where four of its terms reach the last digit.
    const LEAST: f64 = 16.0;
    let (mut shifted, mut correction) = (k, 0.0);
    while shifted < LEAST {
        // e(k) - e(k + 1) = (k + 1/2) ln(1 + 1/k) - 1
        let step = math::ln_positive::<A>(1.0 + 1.0 / shifted);
        correction += A::mul_add(shifted + 0.5, step, -1.0);
        shifted += 1.0;
    }
    let inverse = 1.0 / shifted;
    let square = inverse * inverse;
    let mut series = -1.0 / 1680.0;
    for term in [1.0 / 1260.0, -1.0 / 360.0, 1.0 / 12.0] {
        series = A::mul_add(series, square, term);
    }
    A::mul_add(series, inverse, correction)
}

/// `D(k, mean) = k ln(k/mean) + mean - k` for `k >= 1`.
#[inline(always)]
fn deviance<A: Arith>(k: f64, mean: f64) -> f64 {
    let difference = k - mean;
    let v = difference / (k + mean);
    if v.abs() >= 0.1 {
        return A::mul_add(k, math::ln_positive::<A>(k / mean), -difference);
    }
    // ln(k/mean) = 2 (v + v^3/3 + v^5/5 + ..); the first terms make difference * v.
    let square = v * v;
    let mut series = 1.0 / 17.0;
    for n in (1..8).rev() {
        series = A::mul_add(series, square, 1.0 / f64::from(2 * n + 1));
    }
    let tail = 2.0 * k * (v * square) * series;
    A::mul_add(difference, v, tail)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::arith::Unfused;

    /// `ln P(N = k)` from libm's logarithm of the gamma function.
    fn directly(k: f64, mean: f64) -> f64 {
        k * mean.ln() - mean - libm::lgamma(k + 1.0)
    }

    #[test]
    fn probabilities_are_those_of_the_gamma_function() {
        for mean in [10.0, 33.3, 250.0, 4000.0] {
            for k in [0.0, 1.0, 2.0, 7.0, 15.0, 16.0, 40.0, 230.0, 260.0, 3900.0] {
                let (ours, theirs) = (log_probability::<Unfused>(k, mean), directly(k, mean));
                let scale = 1e-12 * (1.0 + theirs.abs().max(k * mean.ln()));
                assert!(
                    (ours - theirs).abs() < scale,
                    "{k}, {mean}: {ours} {theirs}"
                );
            }
        }
    }

    /// The ratio of the law to the hat may nowhere exceed one; the squeeze must lie below the ratio.
    #[test]
    fn the_hat_lies_above_the_law_and_the_squeeze_below() {
        let small = (0..160).map(|i| 10.0 * 1.025_f64.powi(i));
        for mean in small.chain([1e3, 1e4, 1e5, 1e6, 1e7, 1e9]) {
            let hat = Hat::new(mean);
            for i in 1..8_000 {
                let u = f64::from(i) / 8_000.0 - 0.5;
                let us = 0.5 - u.abs();
                let k = ((2.0 * hat.a / us + hat.b) * u + mean + 0.43).floor();
                if k < 0.0 {
                    continue;
                }
                let slope = (hat.a / (us * us) + hat.b) / hat.inverse_alpha;
                let ratio = log_probability::<Unfused>(k, mean).exp() * slope;
                assert!(ratio < 0.999, "mean {mean}, u {u}: {ratio}");
                if us >= WITHIN {
                    assert!(ratio >= hat.squeeze, "mean {mean}, u {u}: {ratio}");
                }
                if us < 0.013 {
                    assert!(ratio <= us, "mean {mean}, u {u}: {ratio}");
                }
            }
        }
    }
}
