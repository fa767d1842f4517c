//! The law of a strictly monotone function of a number whose law is known.

use super::Law;
use crate::interval::Interval;

/// The law of `x` where `forward(x)` has a known law.
///
/// ```
/// use driftwright_runtime::{Interval, law::{Image, Law, Normal}};
/// // A share whose logit is normal about 0: by symmetry its mean is 1/2.
/// let unit = Interval::new(0.0, false, 1.0, false);
/// let law = Image::new(
///     Normal::new(0.0, 1.0),
///     unit,
///     |x: f64| (x / (1.0 - x)).ln(),
///     |x: f64| 1.0 / (x * (1.0 - x)),
///     |u: f64| 1.0 / (1.0 + (-u).exp()),
/// );
/// assert!((law.mean() - 0.5).abs() < 1e-14);
/// assert!((law.cdf(0.5) - 0.5).abs() < 1e-15);
/// assert_eq!((law.cdf(-1.0), law.cdf(2.0)), (0.0, 1.0));
/// ```
#[derive(Clone, Copy, Debug)]
pub struct Image<L, F, S, I> {
    law: L,
    domain: Interval,
    forward: F,
    slope: S,
    inverse: I,
}

impl<L, F, S, I> Image<L, F, S, I>
where
    L: Law,
    F: Fn(f64) -> f64,
    S: Fn(f64) -> f64,
    I: Fn(f64) -> f64,
{
    /// The law of `x` on `domain`: `forward(x)` follows `law`, `slope` is the derivative of `forward`, which has one
    /// sign, and `inverse` leads back.
    #[must_use]
    pub const fn new(law: L, domain: Interval, forward: F, slope: S, inverse: I) -> Self {
        Self {
            law,
            domain,
            forward,
            slope,
            inverse,
        }
    }
}

impl<L, F, S, I> Law for Image<L, F, S, I>
where
    L: Law,
    F: Fn(f64) -> f64,
    S: Fn(f64) -> f64,
    I: Fn(f64) -> f64,
{
    fn mean(&self) -> f64 {
        self.law.mean_of(&self.inverse)
    }

    fn variance(&self) -> f64 {
        let mean = self.mean();
        self.law.mean_of(|u| {
            let away = (self.inverse)(u) - mean;
            away * away
        })
    }

    fn cdf(&self, x: f64) -> f64 {
        if x < self.domain.lower || (x == self.domain.lower && !self.domain.lower_closed) {
            return 0.0;
        }
        if x >= self.domain.upper {
            return 1.0;
        }
        let below = self.law.cdf((self.forward)(x));
        // At an end the slope may be 0 or infinite, but of the sign it has inside.
        if (self.slope)(x) >= 0.0 {
            below
        } else {
            1.0 - below
        }
    }

    fn density(&self, x: f64) -> f64 {
        if x <= self.domain.lower || x >= self.domain.upper {
            return 0.0;
        }
        self.law.density((self.forward)(x)) * (self.slope)(x).abs()
    }

    fn mean_of(&self, f: impl Fn(f64) -> f64) -> f64 {
        self.law.mean_of(|u| f((self.inverse)(u)))
    }
}
