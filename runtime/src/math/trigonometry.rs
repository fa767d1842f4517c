//! Sine and cosine.
//!
//! The argument less the nearest multiple `k` of pi/2 is kept in two parts; polynomials
//! give sine and cosine of the rest, and `k` chooses between them. No branches.

use super::double::{two_product, two_sum};
use super::exponential::ROUNDER;
use super::polynomial;
use crate::arith::Arith;

/// pi/2 in three parts.
const HALF_PI: [f64; 3] = [
    std::f64::consts::FRAC_PI_2,
    6.123_233_995_736_766e-17,
    -1.497_384_904_859_169_8e-33,
];

/// Above this size (2^50, where doubles lie 1/8 apart) sine and cosine are NaN.
const LARGEST: f64 = 1_125_899_906_842_624.0;

/// `(sin x - x) / x^3` in powers of `x^2` on `|x| <= pi/4`, error 2e-17; fit in 75 digits.
const SINE: [f64; 6] = [
    1.591_810_123_027_412e-10,
    -2.505_113_145_542_794_6e-8,
    2.755_731_610_068_303e-6,
    -0.000_198_412_698_367_549_7,
    0.008_333_333_333_330_946,
    -0.166_666_666_666_666_66,
];

/// `(cos x - 1 + x^2/2) / x^4` in powers of `x^2` on `|x| <= pi/4`, error 2e-18.
const COSINE: [f64; 6] = [
    -1.138_261_486_855_632_5e-11,
    2.087_614_602_468_974_7e-9,
    -2.755_731_727_056_032_6e-7,
    2.480_158_729_876_343_3e-5,
    -0.001_388_888_888_888_739_5,
    0.041_666_666_666_666_664,
];

/// Sine and cosine of `x + low` for `|x| <= pi/4` and a low part below its last bit.
#[inline(always)]
fn kernel<A: Arith>(x: f64, low: f64) -> (f64, f64) {
    let z = x * x;
    let cubic = z * x;
    let sine = A::mul_add(cubic, polynomial::<A, 6>(z, SINE), low * (1.0 - 0.5 * z));
    let half = 0.5 * z;
    let near = 1.0 - half;
    let rest = (1.0 - near) - half;
    let cosine = A::mul_add(z * z, polynomial::<A, 6>(z, COSINE), rest - x * low);
    (x + sine, near + cosine)
}

/// Picks sine and cosine of a quarter turn times `k` plus the kernel's argument.
#[inline(always)]
fn quadrant(k: u64, (sine, cosine): (f64, f64)) -> (f64, f64) {
    let swap = k & 1 != 0;
    let (s, c) = if swap { (cosine, sine) } else { (sine, cosine) };
    let s_sign = (k & 2) << 62;
    let c_sign = (k.wrapping_add(1) & 2) << 62;
    (
        f64::from_bits(s.to_bits() ^ s_sign),
        f64::from_bits(c.to_bits() ^ c_sign),
    )
}

/// Sine and cosine of `2 pi turns` for `0 <= turns <= 1`.
#[inline(always)]
pub(crate) fn sin_cos_turns<A: Arith>(turns: f64) -> (f64, f64) {
    let quarters = 4.0 * turns;
    let shifted = quarters + ROUNDER;
    let rest = quarters - (shifted - ROUNDER);
    quadrant(shifted.to_bits(), kernel::<A>(HALF_PI[0] * rest, 0.0))
}

/// Sine and cosine of any argument up to [`LARGEST`].
#[inline(always)]
fn sin_cos<A: Arith>(x: f64) -> (f64, f64) {
    let x = if x.abs() <= LARGEST { x } else { f64::NAN };
    let shifted = A::mul_add(x, std::f64::consts::FRAC_2_PI, ROUNDER);
    let k = shifted - ROUNDER;
    // Exact: product and error cancel against x down to a multiple of their last bit.
    let (first, first_error) = two_product::<A>(k, HALF_PI[0]);
    let near = (x - first) - first_error;
    let (second, second_error) = two_product::<A>(k, HALF_PI[1]);
    let (high, error) = two_sum(near, -second);
    let tail = error - A::mul_add(k, HALF_PI[2], second_error);
    let (high, low) = two_sum(high, tail);
    quadrant(shifted.to_bits(), kernel::<A>(high, low))
}

/// Sine; NaN above 2^50, where the spacing of doubles (1/8) leaves it no meaning, so that
/// a path that gets there is counted as failed.
///
/// ```
/// use driftwright_runtime::{Unfused, math::sin};
/// assert_eq!(sin::<Unfused>(0.5), 0.479425538604203);
/// ```
#[inline(always)]
#[must_use]
pub fn sin<A: Arith>(x: f64) -> f64 {
    let (sine, _) = sin_cos::<A>(x);
    if x == 0.0 { x } else { sine }
}

/// Cosine; NaN above 2^50, as for [`sin`].
#[inline(always)]
#[must_use]
pub fn cos<A: Arith>(x: f64) -> f64 {
    let (_, cosine) = sin_cos::<A>(x);
    cosine
}
