//! The exponential and what is built on it.
//!
//! `x = k ln 2 + r` with `|r| <= ln(2)/2`; a polynomial gives `e^r - 1`; the factor `2^k` is
//! put into the exponent bits. No branches, so that a loop over lanes vectorises.

use super::double::fast_two_sum;
use super::polynomial;
use crate::arith::Arith;

/// `ln 2` to 33 bits, so that its product with an exponent is exact, and the rest.
pub(super) const LN2: (f64, f64) = (0.693_147_180_485_539_1, 7.440_617_110_012_397e-11);

/// Adding this to a number below 2^51 leaves its nearest integer in the low bits.
pub(super) const ROUNDER: f64 = 6_755_399_441_055_744.0; // 1.5 * 2^52

/// `(e^r - 1 - r) / r^2` on `|r| <= ln(2)/2`, error 2e-18; near-minimax fit in 75 digits.
const SERIES: [f64; 11] = [
    2.091_468_696_808_687_6e-9,
    2.510_521_700_472_074_5e-8,
    2.755_727_364_311_03e-7,
    2.755_725_540_020_642_2e-6,
    2.480_158_732_554_774_3e-5,
    0.000_198_412_698_748_206_27,
    0.001_388_888_888_888_374_8,
    0.008_333_333_333_326_136,
    0.041_666_666_666_666_67,
    0.166_666_666_666_666_7,
    0.5,
];

/// `e^x` as `2^k (1 + r + s)` with `s` the smaller; `k` in two's complement. For `|x| <= 1100`.
struct Parts {
    k: u64,
    r: f64,
    s: f64,
}

impl Parts {
    /// `1 + r + s`.
    #[inline(always)]
    fn growth(&self) -> f64 {
        let (sum, error) = fast_two_sum(1.0, self.r);
        sum + (error + self.s)
    }
}

/// Splits `high + low`; the low part may be as large as a rounding error of the high one,
/// which is many units in the last place of `r`.
#[inline(always)]
fn parts<A: Arith>(high: f64, low: f64) -> Parts {
    let shifted = A::mul_add(high, std::f64::consts::LOG2_E, ROUNDER);
    let k = shifted - ROUNDER;
    let near = A::mul_add(-k, LN2.0, high);
    let reduced = A::mul_add(-k, LN2.1, near);
    let r = reduced + low;
    let tail = A::mul_add(-k, LN2.1, near - reduced) + (low - (r - reduced));
    let quotient = polynomial::<A, 11>(r, SERIES);
    Parts {
        k: shifted.to_bits().wrapping_sub(ROUNDER.to_bits()),
        r,
        s: A::mul_add(r * r, quotient, tail),
    }
}

/// `2^k` for `-1022 <= k <= 1023`.
#[inline(always)]
fn power_of_two(k: u64) -> f64 {
    f64::from_bits(k.wrapping_add(1023) << 52)
}

/// `y 2^k` for `|k| <= 2000`, rounded once: in two factors, since `2^k` may overflow.
#[inline(always)]
fn scale(y: f64, k: u64) -> f64 {
    let half = (k.wrapping_add(4096) >> 1).wrapping_sub(2048);
    y * power_of_two(half) * power_of_two(k.wrapping_sub(half))
}

/// Cuts to a range on which the result has long overflowed or vanished; NaN stays.
#[inline(always)]
fn clamp(x: f64, low: f64, high: f64) -> f64 {
    let x = if x > high { high } else { x };
    if x < low { low } else { x }
}

/// Exponential.
///
/// ```
/// use driftwright_runtime::{Unfused, math::exp};
/// assert_eq!(exp::<Unfused>(1.0), std::f64::consts::E);
/// assert_eq!(exp::<Unfused>(f64::NEG_INFINITY), 0.0);
/// ```
#[inline(always)]
#[must_use]
pub fn exp<A: Arith>(x: f64) -> f64 {
    exp_of_sum::<A>(x, 0.0)
}

/// `e^(high + low)`, for a low part that is a rounding error of the high one.
#[inline(always)]
pub(super) fn exp_of_sum<A: Arith>(high: f64, low: f64) -> f64 {
    let parts = parts::<A>(clamp(high, -1000.0, 1000.0), low);
    scale(parts.growth(), parts.k)
}

/// `e^x - 1`, accurate near 0.
#[inline(always)]
#[must_use]
pub fn expm1<A: Arith>(x: f64) -> f64 {
    let cut = clamp(x, -50.0, 1000.0);
    let parts = parts::<A>(cut, 0.0);
    let factor = power_of_two(parts.k);
    let near = A::mul_add(factor, parts.r + parts.s, factor - 1.0);
    let near = if x == 0.0 { x } else { near };
    if cut > 40.0 {
        scale(parts.growth(), parts.k)
    } else {
        near
    }
}

/// `(e^x - 1) / x`, 1 at 0: the step integral of an exponential.
#[inline(always)]
#[must_use]
pub fn expm1_ratio<A: Arith>(x: f64) -> f64 {
    if x == 0.0 { 1.0 } else { expm1::<A>(x) / x }
}

/// Hyperbolic sine.
#[inline(always)]
#[must_use]
pub fn sinh<A: Arith>(x: f64) -> f64 {
    let size = clamp(x.abs(), 0.0, 1000.0);
    let t = expm1::<A>(size);
    let near = 0.5 * (t + t / (t + 1.0));
    let sinh = if size > 40.0 {
        half_exp::<A>(size)
    } else {
        near
    };
    sinh.copysign(x)
}

/// Hyperbolic cosine.
#[inline(always)]
#[must_use]
pub fn cosh<A: Arith>(x: f64) -> f64 {
    let half = half_exp::<A>(clamp(x.abs(), 0.0, 1000.0));
    half + 0.25 / half
}

/// `e^x / 2` without overflow before the half does.
#[inline(always)]
fn half_exp<A: Arith>(x: f64) -> f64 {
    let parts = parts::<A>(x, 0.0);
    scale(parts.growth(), parts.k.wrapping_sub(1))
}

/// Hyperbolic tangent.
#[inline(always)]
#[must_use]
pub fn tanh<A: Arith>(x: f64) -> f64 {
    let t = expm1::<A>(2.0 * clamp(x.abs(), 0.0, 22.0));
    (t / (t + 2.0)).copysign(x)
}
