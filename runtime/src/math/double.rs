//! Sums and products with their rounding errors.

use crate::arith::{Arith, ArithmeticClass};

/// `a + b` and its rounding error (D. E. Knuth, The Art of Computer Programming 2, 4.2.2).
#[inline(always)]
pub(super) fn two_sum(a: f64, b: f64) -> (f64, f64) {
    let sum = a + b;
    let other = sum - a;
    (sum, (a - (sum - other)) + (b - other))
}

/// `a + b` and its rounding error, for `|a| >= |b|` or `a = 0` (T. J. Dekker 1971).
#[inline(always)]
pub(super) fn fast_two_sum(a: f64, b: f64) -> (f64, f64) {
    let sum = a + b;
    (sum, b - (sum - a))
}

/// `a * b` and its rounding error: one fused multiply-add, or in the unfused class
/// the splitting of T. J. Dekker, Numerische Mathematik 18 (1971), for factors below 2^990.
#[inline(always)]
pub(super) fn two_product<A: Arith>(a: f64, b: f64) -> (f64, f64) {
    let product = a * b;
    if let ArithmeticClass::Fused = A::CLASS {
        return (product, A::mul_add(a, b, -product));
    }
    let (a_high, a_low) = split(a);
    let (b_high, b_low) = split(b);
    let error = ((a_high * b_high - product) + a_high * b_low + a_low * b_high) + a_low * b_low;
    (product, error)
}

/// The leading 26 bits of a number and the rest.
#[inline(always)]
fn split(x: f64) -> (f64, f64) {
    let shifted = 134_217_729.0 * x; // 2^27 + 1
    let high = shifted - (shifted - x);
    (high, x - high)
}
