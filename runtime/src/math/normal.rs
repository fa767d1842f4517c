//! The normal density and distribution function.

use super::double::two_product;
use super::exponential::exp_of_sum;
use crate::arith::Arith;

/// Standard normal density.
///
/// ```
/// use driftwright_runtime::{Unfused, math::normal_pdf};
/// assert_eq!(normal_pdf::<Unfused>(0.0), 0.3989422804014327);
/// ```
#[inline(always)]
#[must_use]
pub fn normal_pdf<A: Arith>(x: f64) -> f64 {
    const FACTOR: f64 = 0.398_942_280_401_432_7;
    // Beyond 40 the density is below the smallest double.
    let size = if x.abs() > 40.0 { 40.0 } else { x };
    let (square, error) = two_product::<A>(size, size);
    FACTOR * exp_of_sum::<A>(-0.5 * square, -0.5 * error)
}

/// Standard normal distribution function, `erfc(-x / sqrt(2)) / 2`. The rounding error of
/// the argument is carried along, so that the far lower tail keeps its relative accuracy.
///
/// ```
/// use driftwright_runtime::{Unfused, math::normal_cdf};
/// assert_eq!(normal_cdf::<Unfused>(0.0), 0.5);
/// ```
#[inline(always)]
#[must_use]
pub fn normal_cdf<A: Arith>(x: f64) -> f64 {
    /// The square root of 1/2 in two parts.
    const ROOT_HALF: (f64, f64) = (std::f64::consts::FRAC_1_SQRT_2, -4.833_646_656_726_457e-17);
    const TWO_OVER_ROOT_PI: f64 = std::f64::consts::FRAC_2_SQRT_PI;
    let cut = if x.abs() > 40.0 { 40f64.copysign(x) } else { x };
    let (high, error) = two_product::<A>(-cut, ROOT_HALF.0);
    let low = A::mul_add(-cut, ROOT_HALF.1, error);
    let slope = TWO_OVER_ROOT_PI * exp_of_sum::<A>(-(high * high), 0.0);
    0.5 * A::mul_add(-low, slope, libm::erfc(high))
}
