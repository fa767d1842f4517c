//! Gamma numbers.

use super::draws::Rejection;
use super::{normal_pair, uniform};
use crate::arith::Arith;
use crate::math;

/// The gamma law of scale 1, its shape the parameter.
///
/// G. Marsaglia and W. W. Tsang, "A simple method for generating gamma variables", ACM Transactions on
/// Mathematical Software 26 (2000): with `d = shape - 1/3` and `x` normal, `d v` with
/// `v = (1 + x/sqrt(9 d))^3` is accepted if `ln u < x^2/2 + d - d v + d ln v`. Below shape 1 the number of
/// shape + 1 is multiplied by `u^(1/shape)` (section 6 there).
pub(super) struct Gamma;

impl Rejection for Gamma {
    #[inline(always)]
    fn attempt<A: Arith>(shape: f64, words: [u64; 4]) -> (f64, bool) {
        let boosted = if shape < 1.0 { shape + 1.0 } else { shape };
        let d = boosted - 1.0 / 3.0;
        let [x, _] = normal_pair::<A>([words[0], words[1]]);
        let t = x / (9.0 * d).sqrt();
        let root = 1.0 + t;
        let accepted = root > 0.0
            && math::ln_positive::<A>(uniform(words[2])) < 3.0 * d * log_remainder::<A>(t);
        let value = d * (root * root * root);
        if shape < 1.0 {
            let exponent = math::ln_positive::<A>(uniform(words[3])) / shape;
            (value * math::exp::<A>(exponent), accepted)
        } else {
            (value, accepted)
        }
    }
}

/// `ln(1 + t) - t + t^2/2 - t^3/3` for `t > -1`: `x^2/2 + d - d v + d ln v` is `3 d` times this, and for a
/// large shape those terms cancel.
#[inline(always)]
fn log_remainder<A: Arith>(t: f64) -> f64 {
    if t.abs() < 0.01 {
        // The next term, t^10/10, is below 4e-13 of the first.
        let mut sum = 1.0 / 9.0;
        for k in (4..9).rev() {
            sum = A::mul_add(-t, sum, 1.0 / f64::from(k));
        }
        return -(t * t) * (t * t) * sum;
    }
    let cubic = A::mul_add(A::mul_add(-1.0 / 3.0, t, 0.5), t, -1.0);
    A::mul_add(cubic, t, math::ln_positive::<A>(1.0 + t))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::arith::Unfused;

    #[test]
    fn the_remainder_is_that_of_the_series_on_both_sides_of_the_switch() {
        for t in [-0.0101_f64, -0.0099, 0.0099, 0.0101] {
            let series: f64 = (4..40).map(|k| -(-t).powi(k) / f64::from(k)).sum();
            let ratio = log_remainder::<Unfused>(t) / series;
            assert!((ratio - 1.0).abs() < 1e-7, "{t}: {ratio}");
        }
    }
}
