//! The error function and the normal law at high precision.
//!
//! Abramowitz and Stegun (1964), Handbook of Mathematical Functions: the series 7.1.6 (all terms
//! positive, so nothing cancels) and the starting value 26.2.23.

use dashu_base::Abs;

use super::big::{Big, is_negative, is_zero, to_f64, whole};

/// Beyond this the tail is below `10^-800` and no longer of use in a comparison.
const MAX_ARGUMENT: f64 = 60.0;

/// `2/sqrt(pi) * integral of exp(-s^2) from 0 to x`.
pub(super) fn erf(x: &Big) -> Option<Big> {
    let precision = x.precision();
    if to_f64(x).abs() > MAX_ARGUMENT {
        return None;
    }
    if is_zero(x) {
        return Some(x.clone());
    }
    let working = precision + 32;
    let wide = x.clone().with_precision(working).value();
    Some(series(&wide, working).with_precision(precision).value())
}

/// `erf(x) = 2/sqrt(pi) exp(-x^2) sum of 2^n x^(2n+1)/(1*3*...*(2n+1))`.
fn series(x: &Big, precision: usize) -> Big {
    let square = x * x;
    let doubled = &square * whole(2, precision);
    let mut term = x.clone();
    let mut total = x.clone();
    let mut odd = 1;
    loop {
        odd += 2;
        term = term * &doubled / whole(odd, precision);
        total = &total + &term;
        if is_negligible(&term, &total, precision) {
            break;
        }
    }
    let root = Big::pi(precision).sqrt();
    total * (-square).exp() * whole(2, precision) / root
}

/// Whether adding `term` no longer changes `total`.
fn is_negligible(term: &Big, total: &Big, precision: usize) -> bool {
    magnitude(term) + (precision as isize) < magnitude(total)
}

/// The binary order of magnitude of a number that is not zero.
fn magnitude(x: &Big) -> isize {
    x.repr().exponent() + x.repr().digits() as isize
}

/// The distribution function of the standard normal law.
pub(super) fn cdf(x: &Big) -> Option<Big> {
    let size = to_f64(x).abs();
    if size > MAX_ARGUMENT {
        return None;
    }
    let precision = x.precision();
    // In the lower tail 1 + erf cancels about x^2/2 nats: carry them.
    let working = precision
        + 64
        + if is_negative(x) {
            (0.75 * size * size) as usize
        } else {
            0
        };
    let wide = x.clone().with_precision(working).value();
    let two = whole(2, working);
    let error = if is_zero(&wide) {
        wide
    } else {
        series(&(wide / two.sqrt()), working)
    };
    Some(
        ((whole(1, working) + error) / two)
            .with_precision(precision)
            .value(),
    )
}

/// The density of the standard normal law.
pub(super) fn pdf(x: &Big) -> Option<Big> {
    let precision = x.precision();
    let two = whole(2, precision);
    Some(super::big::exp(&(-(x * x) / &two))? / (Big::pi(precision) * two).sqrt())
}

/// The quantile function of the standard normal law, on (0, 1), by Halley's iteration.
pub(super) fn quantile(p: &Big) -> Option<Big> {
    let precision = p.precision();
    let one = whole(1, precision);
    if is_negative(p) || is_zero(p) || *p >= one {
        return None;
    }
    let half = &one / whole(2, precision);
    if *p > half {
        return Some(-lower_quantile(&(one - p))?);
    }
    lower_quantile(p)
}

fn lower_quantile(p: &Big) -> Option<Big> {
    let precision = p.precision();
    let tail = (-2.0 * to_f64(&p.ln())).sqrt();
    let start = tail
        - (2.515517 + 0.802853 * tail + 0.010328 * tail * tail)
            / (1.0 + 1.432788 * tail + 0.189269 * tail * tail + 0.001308 * tail.powi(3));
    let mut x = Big::try_from(-start)
        .ok()?
        .with_precision(precision)
        .value();
    let two = whole(2, precision);
    for _ in 0..8 {
        let step = (cdf(&x)? - p) / pdf(&x)?;
        if is_zero(&step) {
            break;
        }
        let correction = &step / (whole(1, precision) + &x * &step / &two);
        x = &x - &correction;
        if is_zero(&x) || is_negligible(&correction.abs(), &x.clone().abs(), precision - 16) {
            break;
        }
    }
    Some(x)
}
