//! The functions of the formula language, the same bits on every machine.
//!
//! Each takes the arithmetic class as a type argument: `exp::<Fused>(x)`. The platform's
//! own mathematical library is never used, since it differs between machines.

use crate::arith::Arith;

/// Square root, correctly rounded.
#[inline(always)]
#[must_use]
pub fn sqrt<A: Arith>(x: f64) -> f64 {
    x.sqrt()
}
macro_rules! delegate {
    ($($(#[$doc:meta])* $name:ident = $target:path;)*) => { $(
        $(#[$doc])*
        #[inline(always)]
        #[must_use]
        pub fn $name<A: Arith>(x: f64) -> f64 {
            $target(x)
        }
    )* };
}

delegate! {
    /// Exponential.
    exp = libm::exp;
    /// `e^x - 1`.
    expm1 = libm::expm1;
    /// Natural logarithm.
    ln = libm::log;
    /// Sine.
    sin = libm::sin;
    /// Cosine.
    cos = libm::cos;
    /// Tangent.
    tan = libm::tan;
    /// Hyperbolic sine.
    sinh = libm::sinh;
    /// Hyperbolic cosine.
    cosh = libm::cosh;
    /// Hyperbolic tangent.
    tanh = libm::tanh;
    /// Inverse sine.
    asin = libm::asin;
    /// Inverse cosine.
    acos = libm::acos;
    /// Inverse tangent.
    atan = libm::atan;
    /// Inverse hyperbolic sine.
    asinh = libm::asinh;
    /// Inverse hyperbolic cosine.
    acosh = libm::acosh;
    /// Inverse hyperbolic tangent.
    atanh = libm::atanh;
    /// Cube root, of negative numbers too.
    cbrt = libm::cbrt;
    /// Error function.
    erf = libm::erf;
}

/// `x^y`; a negative `x` takes only integer `y`.
#[inline(always)]
#[must_use]
pub fn pow<A: Arith>(x: f64, y: f64) -> f64 {
    libm::pow(x, y)
}

/// `x^n` by repeated multiplication.
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

/// `(e^x - 1) / x`, 1 at 0.
#[inline(always)]
#[must_use]
pub fn expm1_ratio<A: Arith>(x: f64) -> f64 {
    if x == 0.0 { 1.0 } else { expm1::<A>(x) / x }
}

/// Standard normal distribution function.
#[inline(always)]
#[must_use]
pub fn normal_cdf<A: Arith>(x: f64) -> f64 {
    0.5 * libm::erfc(-x * std::f64::consts::FRAC_1_SQRT_2)
}

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
    let s = if x > 0.0 { 1.0 } else { x };
    if x < 0.0 { -1.0 } else { s }
}

/// Standard normal density.
#[inline(always)]
#[must_use]
pub fn normal_pdf<A: Arith>(x: f64) -> f64 {
    const FACTOR: f64 = 0.398_942_280_401_432_7;
    FACTOR * exp::<A>(-0.5 * (x * x))
}

mod quantile;
pub use quantile::normal_quantile;
