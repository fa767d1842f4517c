//! One of two normal laws of the same variance.

use super::{Law, Normal};

/// A number that is normal about one centre with some probability, else about another.
///
/// ```
/// use driftwright_runtime::law::{Law, Mixture};
/// let law = Mixture::new(0.25, 3.0, -1.0, 2.0);
/// assert_eq!(law.mean(), 0.0);
/// // Within and between: 4 + 0.25 * 0.75 * 16.
/// assert_eq!(law.variance(), 7.0);
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mixture {
    share: f64,
    first: Normal,
    second: Normal,
}

impl Mixture {
    /// The law about `first` with probability `share`, about `second` otherwise, with a common standard deviation.
    #[must_use]
    pub const fn new(share: f64, first: f64, second: f64, deviation: f64) -> Self {
        Self {
            share,
            first: Normal::new(first, deviation),
            second: Normal::new(second, deviation),
        }
    }

    fn mixed(&self, of: impl Fn(&Normal) -> f64) -> f64 {
        self.share * of(&self.first) + (1.0 - self.share) * of(&self.second)
    }
}

impl Law for Mixture {
    fn mean(&self) -> f64 {
        self.mixed(Law::mean)
    }

    fn variance(&self) -> f64 {
        let apart = self.first.mean() - self.second.mean();
        self.first.variance() + self.share * (1.0 - self.share) * apart * apart
    }

    fn cdf(&self, x: f64) -> f64 {
        self.mixed(|law| law.cdf(x))
    }

    fn density(&self, x: f64) -> f64 {
        self.mixed(|law| law.density(x))
    }

    fn mean_of(&self, f: impl Fn(f64) -> f64) -> f64 {
        self.mixed(|law| law.mean_of(&f))
    }
}
