//! Normal and lognormal laws.

use super::Law;
use crate::arith::Unfused;
use crate::math::{exp, expm1, ln, normal_cdf, normal_pdf};

/// Half the number of points of the trapezoidal rule, and their distance in standard deviations.
const POINTS: i32 = 416;
const DISTANCE: f64 = 1.0 / 32.0;

/// The normal law.
///
/// ```
/// use driftwright_runtime::law::{Law, Normal};
/// let law = Normal::new(1.0, 2.0);
/// assert_eq!((law.mean(), law.variance()), (1.0, 4.0));
/// // Abramowitz and Stegun 1964, table 26.1: P(1.96) = 0.97500 21049.
/// assert!((law.cdf(1.0 + 2.0 * 1.96) - 0.975_002_104_9).abs() < 1e-10);
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Normal {
    mean: f64,
    deviation: f64,
}

impl Normal {
    /// The law with this mean and standard deviation, which is positive; with 0 there is no density.
    #[must_use]
    pub const fn new(mean: f64, deviation: f64) -> Self {
        Self { mean, deviation }
    }

    fn standard(self, x: f64) -> f64 {
        (x - self.mean) / self.deviation
    }
}

impl Law for Normal {
    fn mean(&self) -> f64 {
        self.mean
    }

    fn variance(&self) -> f64 {
        self.deviation * self.deviation
    }

    fn cdf(&self, x: f64) -> f64 {
        normal_cdf::<Unfused>(self.standard(x))
    }

    fn density(&self, x: f64) -> f64 {
        normal_pdf::<Unfused>(self.standard(x)) / self.deviation
    }

    /// The trapezoidal rule, which converges faster than any power on the whole line (Trefethen and Weideman 2014).
    fn mean_of(&self, f: impl Fn(f64) -> f64) -> f64 {
        let term = |i: i32| {
            let z = f64::from(i) * DISTANCE;
            DISTANCE * normal_pdf::<Unfused>(z) * f(self.mean + self.deviation * z)
        };
        (-POINTS..=POINTS).map(term).sum()
    }
}

/// The law of a number whose logarithm is normal.
///
/// ```
/// use driftwright_runtime::law::{Law, Lognormal};
/// let law = Lognormal::new(0.0, 1.0);
/// // Johnson, Kotz and Balakrishnan 1994, section 14.3: mean exp(1/2), variance e (e - 1).
/// assert!((law.mean() - 1.648_721_270_700_128).abs() < 1e-14);
/// assert!((law.variance() - 4.670_774_270_471_605).abs() < 1e-13);
/// assert_eq!((law.cdf(0.0), law.cdf(1.0)), (0.0, 0.5));
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lognormal {
    logarithm: Normal,
}

impl Lognormal {
    /// The law with this mean and standard deviation of the logarithm.
    #[must_use]
    pub const fn new(mean: f64, deviation: f64) -> Self {
        Self {
            logarithm: Normal::new(mean, deviation),
        }
    }
}

impl Law for Lognormal {
    fn mean(&self) -> f64 {
        exp::<Unfused>(self.logarithm.mean() + 0.5 * self.logarithm.variance())
    }

    fn variance(&self) -> f64 {
        let mean = self.mean();
        mean * mean * expm1::<Unfused>(self.logarithm.variance())
    }

    fn cdf(&self, x: f64) -> f64 {
        if x <= 0.0 {
            return 0.0;
        }
        self.logarithm.cdf(ln::<Unfused>(x))
    }

    fn density(&self, x: f64) -> f64 {
        if x <= 0.0 {
            return 0.0;
        }
        self.logarithm.density(ln::<Unfused>(x)) / x
    }

    fn mean_of(&self, f: impl Fn(f64) -> f64) -> f64 {
        self.logarithm.mean_of(|u| f(exp::<Unfused>(u)))
    }
}
