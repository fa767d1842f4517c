//! Moments of the laws that the models lead to, from the literature.

use statrs::distribution::{Continuous, Normal};

/// The first three moments of a quantity, as far as a test knows them.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Moments {
    /// Mean.
    pub mean: Option<f64>,
    /// Variance.
    pub variance: Option<f64>,
    /// Skewness: third central moment over the variance to the power 3/2.
    pub skewness: Option<f64>,
}

impl Moments {
    /// Mean, variance and skewness.
    #[must_use]
    pub fn all(mean: f64, variance: f64, skewness: f64) -> Self {
        Self {
            mean: Some(mean),
            variance: Some(variance),
            skewness: Some(skewness),
        }
    }

    /// Mean and variance.
    #[must_use]
    pub fn two(mean: f64, variance: f64) -> Self {
        Self {
            mean: Some(mean),
            variance: Some(variance),
            skewness: None,
        }
    }

    /// The mean alone.
    #[must_use]
    pub fn mean(mean: f64) -> Self {
        Self {
            mean: Some(mean),
            ..Self::default()
        }
    }

    /// From the raw moments E\[X\], E\[X^2\], E\[X^3\].
    #[must_use]
    pub fn from_raw(raw: [f64; 3]) -> Self {
        let [m1, m2, m3] = raw;
        let variance = m2 - m1 * m1;
        let third = m3 - 3.0 * m1 * m2 + 2.0 * m1.powi(3);
        Self::all(m1, variance, third / variance.powf(1.5))
    }
}

/// The standard normal law (statrs); its quantiles are good to about ten digits.
///
/// # Panics
/// Never: its parameters are fixed.
#[must_use]
pub fn standard_normal() -> Normal {
    Normal::new(0.0, 1.0).expect("a standard normal law")
}

/// The standard normal distribution function, by the error function of libm.
#[must_use]
pub fn phi(x: f64) -> f64 {
    0.5 * libm::erfc(-x * std::f64::consts::FRAC_1_SQRT_2)
}

/// The standard normal density.
#[must_use]
pub fn density(x: f64) -> f64 {
    standard_normal().pdf(x)
}

/// A normal law.
#[must_use]
pub fn normal(mean: f64, variance: f64) -> Moments {
    Moments::all(mean, variance, 0.0)
}

/// The law of `exp(Y)`, Y normal (Johnson, Kotz & Balakrishnan 1994, section 14.3).
#[must_use]
pub fn lognormal(log_mean: f64, log_variance: f64) -> Moments {
    let w = log_variance.exp();
    let mean = (log_mean + log_variance / 2.0).exp();
    let variance = mean * mean * log_variance.exp_m1();
    Moments::all(mean, variance, (w + 2.0) * log_variance.exp_m1().sqrt())
}

/// The law of `Y^2`, Y normal: noncentral chi-square with one degree of freedom, scaled
/// (Johnson, Kotz & Balakrishnan 1995, section 29.4).
#[must_use]
pub fn squared_normal(mean: f64, variance: f64) -> Moments {
    let (m2, v) = (mean * mean, variance);
    let second = 2.0 * v * v + 4.0 * m2 * v;
    let third = 8.0 * v.powi(3) + 24.0 * m2 * v * v;
    Moments::all(m2 + v, second, third / second.powf(1.5))
}

/// The law of `|Y|`, Y normal (Leone, Nelson & Nottingham 1961).
#[must_use]
pub fn folded_normal(mean: f64, variance: f64) -> Moments {
    let s = variance.sqrt();
    let d = mean / s;
    let first = 2.0 * s * density(d) + mean * (1.0 - 2.0 * phi(-d));
    let second = mean * mean + variance;
    // Stein's identity E[(Y - m) g(Y)] = v E[g'(Y)], for g = |y| and for g = y|y|.
    let signed = mean * first + variance * (1.0 - 2.0 * phi(-d));
    let third = mean * signed + 2.0 * variance * first;
    Moments::from_raw([first, second, third])
}

/// The law of an event's indicator.
#[must_use]
pub fn indicator(probability: f64) -> Moments {
    let variance = probability * (1.0 - probability);
    Moments::all(
        probability,
        variance,
        (1.0 - 2.0 * probability) / variance.sqrt(),
    )
}

/// Moments of `g(Y)`, Y normal, by the trapezoid rule, which converges geometrically for smooth g
/// (Trefethen & Weideman 2014, section 2).
#[must_use]
pub fn image_of_normal(mean: f64, variance: f64, g: impl Fn(f64) -> f64) -> Moments {
    let s = variance.sqrt();
    let (step, reach) = (1.0 / 64.0, 12 * 64);
    let mut raw = [0.0; 3];
    for i in -reach..=reach {
        let z = f64::from(i) * step;
        let weight = density(z) * step;
        let value = g(mean + s * z);
        for (power, sum) in raw.iter_mut().enumerate() {
            *sum += weight * value.powi(power as i32 + 1);
        }
    }
    Moments::from_raw(raw)
}

/// `E[max(X - K, 0)]` for `X` log-normal with mean `forward` and log variance `variance`
/// (Black 1976, without its discount factor).
#[must_use]
pub fn black_call(forward: f64, strike: f64, variance: f64) -> f64 {
    let s = variance.sqrt();
    let d1 = ((forward / strike).ln() + variance / 2.0) / s;
    forward * phi(d1) - strike * phi(d1 - s)
}

/// `E[max(K - X, 0)]` for X normal (Bachelier 1900).
#[must_use]
pub fn bachelier_put(mean: f64, variance: f64, strike: f64) -> f64 {
    let s = variance.sqrt();
    let d = (strike - mean) / s;
    (strike - mean) * phi(d) + s * density(d)
}

/// `(1 - exp(-rate*t))/rate`.
#[must_use]
pub fn decayed(rate: f64, t: f64) -> f64 {
    -(-rate * t).exp_m1() / rate
}

/// The mean of an Ornstein-Uhlenbeck process (Uhlenbeck & Ornstein 1930).
#[must_use]
pub fn ou_mean(start: f64, level: f64, speed: f64, t: f64) -> f64 {
    level + (start - level) * (-speed * t).exp()
}

/// Its variance (Uhlenbeck & Ornstein 1930).
#[must_use]
pub fn ou_variance(speed: f64, volatility: f64, t: f64) -> f64 {
    volatility * volatility * decayed(2.0 * speed, t)
}

/// `int_0^t B(a, u) B(b, u) du` with B(a, u) = (1 - exp(-a u))/a: the covariance of the integrals of two
/// Ornstein-Uhlenbeck processes with unit noise (Brigo & Mercurio 2006, section 4.2, from memory).
#[must_use]
pub fn integrated_covariance(a: f64, b: f64, t: f64) -> f64 {
    (t - decayed(a, t) - decayed(b, t) + decayed(a + b, t)) / (a * b)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn folded_law_without_mean_is_half_normal() {
        // Half-normal: mean sqrt(2/pi), variance 1 - 2/pi, skewness 0.9952717 (Johnson, Kotz & Balakrishnan 1994, 13.10.3).
        let law = folded_normal(0.0, 1.0);
        assert!((law.mean.unwrap() - (2.0 / std::f64::consts::PI).sqrt()).abs() < 1e-12);
        assert!((law.variance.unwrap() - (1.0 - 2.0 / std::f64::consts::PI)).abs() < 1e-12);
        assert!((law.skewness.unwrap() - 0.995_271_746_431_156).abs() < 1e-9);
    }

    #[test]
    fn quadrature_reproduces_the_lognormal_law() {
        let (by_sum, law) = (image_of_normal(0.3, 0.2, f64::exp), lognormal(0.3, 0.2));
        assert!((by_sum.mean.unwrap() - law.mean.unwrap()).abs() < 1e-12);
        assert!((by_sum.variance.unwrap() - law.variance.unwrap()).abs() < 1e-12);
        assert!((by_sum.skewness.unwrap() - law.skewness.unwrap()).abs() < 1e-10);
    }
}
