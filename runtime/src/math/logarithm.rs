//! The logarithm and powers.
//!
//! `x = 2^k m` with `m` in `[sqrt(1/2), sqrt(2))`, and `ln m = 2 atanh(s)` with
//! `s = (m - 1)/(m + 1)`, a series in `s^2`. No branches.

use super::double::{fast_two_sum, two_product, two_sum};
use super::exponential::{LN2, exp_of_sum};
use super::polynomial;
use crate::arith::Arith;

/// `(2 atanh(s)/s - 2) / s^2` in powers of `s^2`, relative error of the logarithm 5e-18;
/// near-minimax fit in 75 digits.
const SERIES: [f64; 7] = [
    0.146_165_854_248_886_23,
    0.153_317_106_182_107_73,
    0.181_828_894_556_749_47,
    0.222_222_111_302_598_78,
    0.285_714_286_260_032_7,
    0.399_999_999_998_994_44,
    0.666_666_666_666_667,
];

/// The same series from its second term on, relative error of the logarithm below 2^-65.
const TAIL: [f64; 8] = [
    0.117_231_786_238_765_18,
    0.117_062_363_394_912_06,
    0.133_348_046_938_471_3,
    0.153_845_949_625_184_3,
    0.181_818_183_353_928_02,
    0.222_222_222_216_558_85,
    0.285_714_285_714_293_64,
    0.4,
];

/// 2/3 in two parts.
const TWO_THIRDS: (f64, f64) = (0.666_666_666_666_666_6, 3.700_743_415_417_188e-17);

/// The bits of 1 and of the double next to `sqrt(1/2)`.
const ONE: u64 = 0x3ff0_0000_0000_0000;
const SQRT_HALF: u64 = 0x3fe6_a09e_667f_3bcd;

/// Splits a positive normal number into `k` and `m`.
#[inline(always)]
fn split(x: f64) -> (f64, f64) {
    const TWO_52: u64 = 0x4330_0000_0000_0000;
    let shifted = x.to_bits().wrapping_add(ONE - SQRT_HALF);
    let k = f64::from_bits((shifted >> 52) | TWO_52) - (4_503_599_627_370_496.0 + 1023.0);
    let m = f64::from_bits((shifted & 0x000f_ffff_ffff_ffff).wrapping_add(SQRT_HALF));
    (k, m)
}

/// As [`split`], for subnormal numbers too.
#[inline(always)]
fn split_any(x: f64) -> (f64, f64) {
    let tiny = x < f64::MIN_POSITIVE;
    let (k, m) = split(if tiny {
        x * 18_014_398_509_481_984.0
    } else {
        x
    }); // 2^54
    (if tiny { k - 54.0 } else { k }, m)
}

/// The logarithm of `2^k m`.
#[inline(always)]
fn ln_parts<A: Arith>(k: f64, m: f64) -> f64 {
    let f = m - 1.0;
    let s = f / (m + 1.0);
    let z = s * s;
    let rest = z * polynomial::<A, 7>(z, SERIES);
    // ln m = f - f^2/2 + s (f^2/2 + rest): the leading term f is exact.
    let half_square = 0.5 * f * f;
    let low = A::mul_add(s, half_square + rest, k * LN2.1);
    A::mul_add(k, LN2.0, f - (half_square - low))
}

/// Logarithm of a positive normal number, without the checks of [`ln`].
#[inline(always)]
pub(crate) fn ln_positive<A: Arith>(x: f64) -> f64 {
    let (k, m) = split(x);
    ln_parts::<A>(k, m)
}

/// Natural logarithm: -inf at 0, NaN below.
///
/// ```
/// use driftwright_runtime::{Unfused, math::ln};
/// assert_eq!(ln::<Unfused>(2.0), std::f64::consts::LN_2);
/// assert!(ln::<Unfused>(-1.0).is_nan());
/// ```
#[inline(always)]
#[must_use]
pub fn ln<A: Arith>(x: f64) -> f64 {
    let (k, m) = split_any(x);
    let value = ln_parts::<A>(k, m);
    let value = if x < f64::INFINITY { value } else { x };
    let value = if x == 0.0 { f64::NEG_INFINITY } else { value };
    if x < 0.0 { f64::NAN } else { value }
}

/// The logarithm of a positive number in two parts, relative error below 2^-63.
#[inline(always)]
fn ln_double<A: Arith>(x: f64) -> (f64, f64) {
    let (k, m) = split_any(x);
    let f = m - 1.0;
    let (g, g_low) = two_sum(m, 1.0);
    let inverse = 1.0 / g;
    let s = f * inverse;
    let (back, back_low) = two_product::<A>(s, g);
    let s_low = (((f - back) - back_low) - s * g_low) * inverse;
    let (z, z_error) = two_product::<A>(s, s);
    let z_low = z_error + 2.0 * s * s_low;
    let (q, q_error) = fast_two_sum(TWO_THIRDS.0, z * polynomial::<A, 8>(z, TAIL));
    let q_low = q_error + TWO_THIRDS.1;
    let (w, w_error) = two_product::<A>(z, q);
    let w_low = w_error + (z * q_low + z_low * q);
    let (t, t_error) = two_product::<A>(s, w);
    let t_low = t_error + (s * w_low + s_low * w);
    let (u, u_error) = fast_two_sum(2.0 * s, t);
    let u_low = u_error + (t_low + 2.0 * s_low);
    let (v, v_error) = two_sum(k * LN2.0, u);
    fast_two_sum(v, v_error + (u_low + k * LN2.1))
}

/// `x^y`. A negative `x` takes only integer `y` (else NaN); `x^0` and `1^y` are 1.
///
/// ```
/// use driftwright_runtime::{Unfused, math::pow};
/// assert_eq!(pow::<Unfused>(-2.0, 3.0), -8.0);
/// assert!(pow::<Unfused>(-8.0, 1.0 / 3.0).is_nan());
/// ```
#[inline(always)]
#[must_use]
pub fn pow<A: Arith>(x: f64, y: f64) -> f64 {
    /// Beyond 2^66 a power of any double but 1 has overflowed or vanished.
    const LARGE: f64 = 73_786_976_294_838_206_464.0;
    let exponent = if y > LARGE { LARGE } else { y };
    let exponent = if exponent < -LARGE { -LARGE } else { exponent };
    let (l, l_low) = ln_double::<A>(x.abs());
    let (p, p_error) = two_product::<A>(l, exponent);
    let p_low = A::mul_add(l_low, exponent, p_error);
    let p_low = if p.abs() < 1000.0 { p_low } else { 0.0 };
    let size = exp_of_sum::<A>(p, p_low);
    // Zero and infinite bases: the result is 0 or infinite by the sign of the exponent.
    let grows = (x == 0.0) == (y < 0.0);
    let limit = if grows { f64::INFINITY } else { 0.0 };
    let edge = (x == 0.0) | (x.abs() == f64::INFINITY);
    with_sign(x, y, if edge { limit } else { size })
}

/// Gives `|x|^y` the sign of `x^y` and settles the cases in which no logarithm exists.
#[inline(always)]
fn with_sign(x: f64, y: f64, size: f64) -> f64 {
    let integer = is_integer(y.abs());
    let odd = integer & !is_integer(0.5 * y.abs());
    let negative = x.is_sign_negative();
    let value = if negative & odd { -size } else { size };
    let rootless = (x < 0.0) & (x > f64::NEG_INFINITY) & !integer;
    let value = if rootless { f64::NAN } else { value };
    let value = if x.is_nan() | y.is_nan() {
        f64::NAN
    } else {
        value
    };
    if (y == 0.0) | (x == 1.0) { 1.0 } else { value }
}

/// Whether a number that is not negative has no fractional part; true for infinity.
#[inline(always)]
fn is_integer(x: f64) -> bool {
    const TWO_52: f64 = 4_503_599_627_370_496.0;
    (x >= TWO_52) | ((x + TWO_52) - TWO_52 == x)
}

/// `x^n` by repeated multiplication; a loop over lanes vectorises when `n` is a literal.
/// The error grows with `n`: about `log2(n)` roundings on the longest way.
#[inline(always)]
#[must_use]
pub fn powi<A: Arith>(x: f64, n: i32) -> f64 {
    let mut result = 1.0;
    let mut square = x;
    let mut rest = n.unsigned_abs();
    while rest != 0 {
        if rest & 1 == 1 {
            result *= square;
        }
        square *= square;
        rest >>= 1;
    }
    if n < 0 { 1.0 / result } else { result }
}
