//! Comparisons with a select: the order of the operands is part of the program.

use crate::arith::Arith;

/// The smaller of two numbers, `a < b ? a : b`: the second if either is NaN.
#[inline(always)]
#[must_use]
pub fn min<A: Arith>(a: f64, b: f64) -> f64 {
    if a < b { a } else { b }
}

/// The larger of two numbers, `a > b ? a : b`: the second if either is NaN.
#[inline(always)]
#[must_use]
pub fn max<A: Arith>(a: f64, b: f64) -> f64 {
    if a > b { a } else { b }
}

/// Absolute value.
#[inline(always)]
#[must_use]
pub fn abs<A: Arith>(x: f64) -> f64 {
    x.abs()
}

/// -1, 0 or 1; NaN for NaN.
#[inline(always)]
#[must_use]
pub fn sign<A: Arith>(x: f64) -> f64 {
    let upper = if x > 0.0 { 1.0 } else { x };
    if x < 0.0 { -1.0 } else { upper }
}

/// Square root, correctly rounded; NaN below 0.
#[inline(always)]
#[must_use]
pub fn sqrt<A: Arith>(x: f64) -> f64 {
    x.sqrt()
}
