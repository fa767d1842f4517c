//! The functions of the formula language, the same bits on every machine.
//!
//! Each takes the arithmetic class as a type argument, `exp::<Fused>(x)`, and is
//! `#[inline(always)]`. The platform's own mathematical library is never used, since it
//! differs between machines. A loop over a lane of `exp`, `ln`, `sin`, `cos`, `sinh`, `cosh`,
//! `tanh`, `expm1`, `pow`, `powi`, `normal_pdf` and the selections vectorises; the rarer ones
//! call the crate `libm`, one path after the other.
//!
//! Worst errors in units of the last place, either class, over 10,000 arguments against
//! 128-bit arithmetic (`tests/math_accuracy.rs` holds them); those of `sqrt`, `abs`, `min`, `max`
//! and `sign` are those of IEEE 754:
//!
//! | function | error | | function | error |
//! |---|---|---|---|---|
//! | `exp` | 0.7 | | `tan` | 0.7 |
//! | `expm1` | 1.3 | | `asin` | 0.8 |
//! | `ln` | 0.8 | | `acos` | 0.9 |
//! | `pow` | 0.7 | | `atan` | 0.8 |
//! | `sin` | 0.9 | | `asinh` | 1.3 |
//! | `cos` | 0.8 | | `acosh` | 1.8 |
//! | `sinh` | 1.7 | | `atanh` | 1.5 |
//! | `cosh` | 1.1 | | `cbrt` | 0.6 |
//! | `tanh` | 2.0 | | `normal_pdf` | 1.9 |

mod double;
mod exponential;
mod logarithm;
mod normal;
mod quantile;
mod select;
mod trigonometry;

use crate::arith::Arith;

pub use exponential::{cosh, exp, expm1, expm1_ratio, sinh, tanh};
pub(crate) use logarithm::ln_positive;
pub use logarithm::{ln, pow, powi};
pub use normal::{normal_cdf, normal_pdf};
pub use quantile::normal_quantile;
pub use select::{abs, max, min, sign, sqrt};
pub(crate) use trigonometry::sin_cos_turns;
pub use trigonometry::{cos, sin};

/// The polynomial with these coefficients, highest power first.
#[inline(always)]
fn polynomial<A: Arith, const N: usize>(x: f64, coefficients: [f64; N]) -> f64 {
    let mut value = coefficients[0];
    for &coefficient in &coefficients[1..] {
        value = A::mul_add(value, x, coefficient);
    }
    value
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
    /// Tangent.
    tan = libm::tan;
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
