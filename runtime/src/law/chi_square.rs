//! Multiples of noncentral chi-square variables, stopped at 0 or not.

use super::Law;
use super::gamma::{incomplete_gamma, poisson};
use crate::arith::Unfused;
use crate::math::{exp, ln};

/// Above this noncentrality the mixture has too many terms to add up.
const LARGEST_NONCENTRALITY: f64 = 1e7;

/// `P(X <= x)` for a noncentral chi-square variable with `freedom >= 0` degrees of freedom: the mixture
/// `sum_j Poisson(j; noncentrality/2) P(freedom/2 + j, x/2)` of incomplete gamma functions (Johnson, Kotz and
/// Balakrishnan 1995, section 29.3; with an atom at 0 for 0 degrees of freedom, Siegel 1979). None where the
/// law does not exist and where the noncentrality is too large for that sum. Absolute error about 1e-12.
///
/// ```
/// use driftwright_runtime::law::noncentral_cdf;
/// // C. G. Ding, "Algorithm AS 275", Applied Statistics 41 (1992), table of test values, from memory.
/// let value = noncentral_cdf(9.23636, 5.0, 1.0).unwrap();
/// assert!((value - 0.8272918751).abs() < 1e-10);
/// ```
#[must_use]
pub fn noncentral_cdf(x: f64, freedom: f64, noncentrality: f64) -> Option<f64> {
    let sound = freedom >= 0.0
        && freedom.is_finite()
        && (0.0..=LARGEST_NONCENTRALITY).contains(&noncentrality)
        && !x.is_nan();
    if !sound {
        return None;
    }
    if x < 0.0 {
        return Some(0.0);
    }
    if x == f64::INFINITY {
        return Some(1.0);
    }
    let (half, mean) = (x / 2.0, noncentrality / 2.0);
    // What lies further out than this has a probability below 1e-30.
    let reach = 12.0 * mean.sqrt() + 60.0;
    let (first, last) = ((mean - reach).max(0.0).floor(), (mean + reach).ceil());
    // Downwards from the last term P(a, x) = P(a + 1, x) + x^a e^-x/Gamma(a + 1) adds what is positive.
    let mut shape = freedom / 2.0 + last;
    let mut lower = incomplete_gamma(shape, half);
    let mut sum = 0.0;
    let mut j = last;
    loop {
        sum += poisson(j, mean) * lower;
        if j <= first {
            return Some(sum.min(1.0));
        }
        j -= 1.0;
        shape = freedom / 2.0 + j;
        lower += poisson(shape, half);
    }
}

/// The density of such a variable: the mixture of central densities, added up from its largest term on.
fn noncentral_density(x: f64, freedom: f64, noncentrality: f64) -> f64 {
    let (half, mean) = (x / 2.0, noncentrality / 2.0);
    if x <= 0.0 {
        return 0.0;
    }
    let shape = freedom / 2.0;
    let term = |j: f64| poisson(j, mean) * poisson(shape + j - 1.0, half) / 2.0;
    // At 0 degrees of freedom the first term is the atom.
    let first = if shape == 0.0 { 1.0 } else { 0.0 };
    let middle = shape - 1.0;
    let root = (middle * middle / 4.0 + mean * half).sqrt();
    let largest = (root - middle / 2.0).floor().max(first);
    let start = term(largest);
    let push = mean * half;
    let (mut sum, mut next, mut j) = (start, start, largest);
    while next > sum * 1e-17 {
        next *= push / ((j + 1.0) * (shape + j));
        sum += next;
        j += 1.0;
    }
    (next, j) = (start, largest);
    while j > first && next > sum * 1e-17 {
        next *= j * (shape + j - 1.0) / push;
        sum += next;
        j -= 1.0;
    }
    sum
}

/// The law of a square-root process after a step: `scale` times a noncentral chi-square variable. With fewer than two
/// degrees of freedom the process reaches 0, where it is reflected or stopped.
///
/// ```
/// use driftwright_runtime::law::{ChiSquare, Law};
/// let law = ChiSquare::reflected(0.5, 3.0, 2.0);
/// // Johnson, Kotz and Balakrishnan 1995, section 29.4: mean and variance are d + l and 2 (d + 2 l).
/// assert_eq!((law.mean(), law.variance()), (2.5, 3.5));
/// // Stopped at 0 and without drift there (dimension 0) it is a martingale.
/// let stopped = ChiSquare::absorbed(0.5, 0.0, 2.0);
/// assert!((stopped.mean() - 1.0).abs() < 1e-12);
/// assert!((stopped.cdf(0.0) - (-1f64).exp()).abs() < 1e-15);
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ChiSquare {
    scale: f64,
    freedom: f64,
    noncentrality: f64,
    stopped: bool,
}

impl ChiSquare {
    /// The law of a process that is reflected at 0 where it has fewer than two degrees of freedom, and stopped there where
    /// it has none or fewer. `scale` is positive, `noncentrality` not negative.
    #[must_use]
    pub const fn reflected(scale: f64, freedom: f64, noncentrality: f64) -> Self {
        Self {
            scale,
            freedom,
            noncentrality,
            stopped: freedom <= 0.0,
        }
    }

    /// The law of a process that is stopped at 0 where it has fewer than two degrees of freedom.
    #[must_use]
    pub const fn absorbed(scale: f64, freedom: f64, noncentrality: f64) -> Self {
        Self {
            stopped: freedom < 2.0,
            ..Self::reflected(scale, freedom, noncentrality)
        }
    }

    /// Whether the process stays at 0 once there, so that the law has an atom.
    #[must_use]
    pub const fn is_stopped(&self) -> bool {
        self.stopped
    }

    /// The density beside an atom in units of the scale. A stopped process has that of `4 - d` degrees of freedom times
    /// `(x/noncentrality)^(d/2 - 1)` (Borodin and Salminen 2002, appendix 1.21, by Bessel functions of opposite index).
    fn unit_density(&self, x: f64) -> f64 {
        if !self.stopped {
            return noncentral_density(x, self.freedom, self.noncentrality);
        }
        if x <= 0.0 || self.noncentrality <= 0.0 {
            return 0.0;
        }
        let power = self.freedom / 2.0 - 1.0;
        let ratio = exp::<Unfused>(power * ln::<Unfused>(x / self.noncentrality));
        ratio * noncentral_density(x, 4.0 - self.freedom, self.noncentrality)
    }
}

impl Law for ChiSquare {
    fn mean(&self) -> f64 {
        if self.stopped {
            return self.mean_of(|x| x);
        }
        self.scale * (self.freedom + self.noncentrality)
    }

    fn variance(&self) -> f64 {
        if self.stopped {
            let mean = self.mean();
            return self.mean_of(|x| (x - mean) * (x - mean));
        }
        2.0 * self.scale * self.scale * (self.freedom + 2.0 * self.noncentrality)
    }

    /// Not a number where the noncentrality is above 1e7. A stopped process is above z times its scale with the
    /// probability that a chi-square variable of `2 - d` degrees of freedom and noncentrality z is below the process's own
    /// noncentrality (Schroder 1989, section 1).
    fn cdf(&self, x: f64) -> f64 {
        if x < 0.0 {
            return 0.0;
        }
        let z = x / self.scale;
        let below = if self.stopped {
            noncentral_cdf(self.noncentrality, 2.0 - self.freedom, z).map(|above| 1.0 - above)
        } else {
            noncentral_cdf(z, self.freedom, self.noncentrality)
        };
        below.unwrap_or(f64::NAN)
    }

    fn density(&self, x: f64) -> f64 {
        self.unit_density(x / self.scale) / self.scale
    }

    /// The trapezoidal rule in the logarithm, in which the density falls at least exponentially on both sides.
    fn mean_of(&self, f: impl Fn(f64) -> f64) -> f64 {
        let shape = if self.stopped {
            1.0
        } else {
            self.freedom / 2.0
        };
        let centre = self.freedom.abs() + self.noncentrality + 1.0;
        let spread = (2.0 * (self.freedom.abs() + 2.0 * self.noncentrality + 1.0)).sqrt();
        let top = ln::<Unfused>(centre + 40.0 * spread + 80.0);
        // The mass below this is less than 1e-17, or a power of x accounts for it.
        let bottom = if centre > 15.0 * spread {
            ln::<Unfused>(centre - 14.0 * spread)
        } else {
            (ln::<Unfused>(centre) - 40.0 / shape - 1.0).max(-600.0)
        };
        let distance = (spread / centre / 16.0).min(1.0 / 32.0);
        let points = ((top - bottom) / distance).ceil();
        let term = |i: f64| {
            let x = exp::<Unfused>(bottom + i * distance);
            x * self.unit_density(x) * f(self.scale * x)
        };
        // Below the first point the density is a power of x.
        let mut sum = term(0.0) * (0.5 + 1.0 / (shape * distance));
        let mut i = 1.0;
        while i <= points {
            sum += term(i);
            i += 1.0;
        }
        let atom = if self.stopped || self.freedom == 0.0 {
            self.cdf(0.0)
        } else {
            0.0
        };
        let stopped = if atom > 0.0 { atom * f(0.0) } else { 0.0 };
        sum * distance + stopped
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_degree_of_freedom_is_a_squared_normal() {
        use crate::math::normal_cdf;
        for (x, noncentrality) in [(0.3_f64, 0.0_f64), (2.0, 0.5), (9.0, 4.0), (410.0, 400.0)] {
            let (root, shift) = (x.sqrt(), noncentrality.sqrt());
            let exact = normal_cdf::<Unfused>(root - shift) - normal_cdf::<Unfused>(-root - shift);
            let value = noncentral_cdf(x, 1.0, noncentrality).unwrap();
            assert!(
                (value - exact).abs() < 1e-12,
                "{x}, {noncentrality}: {value} {exact}"
            );
        }
    }

    /// Moments by quadrature against those in closed form (Johnson, Kotz and Balakrishnan 1995, section 29.4), from few to
    /// many degrees of freedom and far out.
    #[test]
    fn quadrature_gives_the_moments_in_closed_form() {
        for freedom in [0.05, 0.5, 1.0, 2.0, 7.3, 400.0] {
            for noncentrality in [0.0, 1e-3, 0.7, 30.0, 5e3, 1e5] {
                let law = ChiSquare::reflected(0.3, freedom, noncentrality);
                let mean = law.mean();
                let (mass, first) = (law.mean_of(|_| 1.0), law.mean_of(|x| x));
                let second = law.mean_of(|x| (x - mean) * (x - mean));
                let shown = format!("{freedom} {noncentrality}: {mass} {first} {second}");
                assert!((mass - 1.0).abs() < 1e-9, "{shown}");
                assert!((first / mean - 1.0).abs() < 1e-9, "{shown}");
                assert!((second / law.variance() - 1.0).abs() < 1e-8, "{shown}");
            }
        }
    }

    /// Stopped at 0: atom and rest are one, and without drift (no degrees of freedom) the mean is kept; with `d` degrees
    /// the mean of `x^(1 - d/2)` is kept, which is a martingale of the process (Revuz and Yor 1999, chapter XI).
    #[test]
    fn stopped_laws_keep_their_martingale() {
        for freedom in [-1.0_f64, 0.0, 0.5, 1.5] {
            for noncentrality in [0.2, 3.0, 90.0] {
                let law = ChiSquare::absorbed(1.0, freedom, noncentrality);
                let power = 1.0 - freedom / 2.0;
                let (mass, kept) = (law.mean_of(|_| 1.0), law.mean_of(|x| x.powf(power)));
                let shown = format!("{freedom} {noncentrality}: {mass} {kept}");
                assert!((mass - 1.0).abs() < 1e-9, "{shown}");
                assert!(
                    (kept / noncentrality.powf(power) - 1.0).abs() < 1e-9,
                    "{shown}"
                );
            }
        }
    }

    #[test]
    fn two_central_degrees_are_exponential_and_none_is_an_atom() {
        let value = noncentral_cdf(3.0, 2.0, 0.0).unwrap();
        assert!((value + f64::exp_m1(-1.5)).abs() < 1e-14);
        assert!((noncentral_cdf(0.0, 0.0, 3.0).unwrap() - (-1.5_f64).exp()).abs() < 1e-15);
        assert_eq!(noncentral_cdf(1.0, 2.0, 1e9), None);
    }
}
