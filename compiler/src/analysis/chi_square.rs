//! The distribution function of the noncentral chi-square law.

/// Above this noncentrality the mixture has too many terms to add up.
const LARGEST_NONCENTRALITY: f64 = 1e7;

/// `P(X <= x)` for a noncentral chi-square variable with `freedom >= 0` degrees of freedom: the mixture
/// `sum_j Poisson(j; noncentrality/2) P(freedom/2 + j, x/2)` of incomplete gamma functions (Johnson, Kotz and
/// Balakrishnan 1995, section 29.3; with an atom at 0 for 0 degrees of freedom, Siegel 1979). None where the
/// law does not exist and where the noncentrality is too large for that sum. Absolute error about 1e-12.
///
/// ```
/// use driftwright::analysis::chi_square::noncentral_cdf;
/// // C. G. Ding, "Algorithm AS 275", Applied Statistics 41 (1992), table of test values, from memory.
/// let value = noncentral_cdf(9.23636, 5.0, 1.0).unwrap();
/// assert!((value - 0.8272918751).abs() < 1e-10);
/// ```
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

/// `mean^k e^-mean/Gamma(k + 1)`, also for `k` that are no integers.
fn poisson(k: f64, mean: f64) -> f64 {
    if mean == 0.0 {
        return if k == 0.0 { 1.0 } else { 0.0 };
    }
    (k * mean.ln() - mean - libm::lgamma(k + 1.0)).exp()
}

/// The regularised lower incomplete gamma function `P(shape, x)`: its series below `shape + 1`, above it the
/// continued fraction of its complement (Abramowitz and Stegun 1964, 6.5.29 and 6.5.31).
pub fn incomplete_gamma(shape: f64, x: f64) -> f64 {
    if shape == 0.0 {
        return 1.0;
    }
    if x == 0.0 {
        return 0.0;
    }
    let density = poisson(shape, x);
    if x < shape + 1.0 {
        let (mut term, mut sum, mut n) = (1.0, 1.0, shape);
        while term > sum * 1e-17 {
            n += 1.0;
            term *= x / n;
            sum += term;
        }
        return density * sum;
    }
    1.0 - density * shape / x * complement(shape, x)
}

/// `x^(1-a) e^x Gamma(a, x)` by its continued fraction, evaluated as Lentz (1976) does.
fn complement(a: f64, x: f64) -> f64 {
    let tiny = f64::MIN_POSITIVE / f64::EPSILON;
    let mut b = x + 1.0 - a;
    let mut c = 1.0 / tiny;
    let mut d = 1.0 / b;
    let mut value = d;
    for i in 1..100_000 {
        let i = f64::from(i);
        let numerator = -i * (i - a);
        b += 2.0;
        let denominator = numerator * d + b;
        d = 1.0
            / if denominator.abs() < tiny {
                tiny
            } else {
                denominator
            };
        c = b + numerator / c;
        c = if c.abs() < tiny { tiny } else { c };
        value *= d * c;
        if (d * c - 1.0).abs() < 1e-16 {
            break;
        }
    }
    value * x
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_degree_of_freedom_is_a_squared_normal() {
        use driftwright_runtime::{Unfused, math::normal_cdf};
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

    #[test]
    fn two_central_degrees_are_exponential_and_none_is_an_atom() {
        let value = noncentral_cdf(3.0, 2.0, 0.0).unwrap();
        assert!((value + f64::exp_m1(-1.5)).abs() < 1e-14);
        assert!((noncentral_cdf(0.0, 0.0, 3.0).unwrap() - (-1.5_f64).exp()).abs() < 1e-15);
        assert_eq!(noncentral_cdf(1.0, 2.0, 1e9), None);
    }
}
