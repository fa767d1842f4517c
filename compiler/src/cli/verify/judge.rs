//! Verdicts on statistics: z-scores, the family's threshold, the allowance for discretisation.

use driftwright_runtime::Unfused;
use driftwright_runtime::math::normal_quantile;

/// The probability that any of a model's checks fails although all is right.
pub(super) const FAMILY_ERROR: f64 = 1e-3;

/// Rounding of a path, relative to the size of its values: the accuracy that is asked for where there
/// is no noise to hide behind.
pub(super) const ROUNDING: f64 = 1e-9;

/// One statistic of one quantity at one time, held against its analytic value.
#[derive(Clone, Debug)]
pub(super) struct Check {
    /// The quantity, or the formula of a claim.
    pub(super) quantity: String,
    /// The statistic.
    pub(super) statistic: &'static str,
    /// The time.
    pub(super) time: f64,
    /// The analytic value.
    pub(super) analytic: f64,
    /// The sample's value.
    pub(super) sample: f64,
    /// Its standard error; 0 where there is no noise.
    pub(super) std_error: f64,
    /// Estimated bias of discretisation; none where the scheme is exact.
    pub(super) bias: Option<f64>,
    /// Deviation that rounding alone explains.
    pub(super) rounding: f64,
    /// Where the analytic value comes from.
    pub(super) source: String,
    /// The claim that is put to the test, if it is one.
    pub(super) claim: Option<String>,
}

impl Check {
    /// Deviation of the sample in standard errors; 0 where both agree without noise.
    pub(super) fn z(&self) -> f64 {
        let gap = self.sample - self.analytic;
        if gap.abs() <= self.rounding {
            0.0
        } else {
            gap / self.std_error
        }
    }

    /// Whether the deviation is within the threshold, and the estimated bias beside it.
    pub(super) fn passed(&self, threshold: f64) -> bool {
        let bias = self.bias.map_or(0.0, f64::abs);
        let allowed = threshold * self.std_error + bias + self.rounding;
        (self.sample - self.analytic).abs() <= allowed
    }
}

/// The threshold for each of `checks` two-sided z-tests at the family's error (Sidak 1967,
/// "Rectangular confidence regions for the means of multivariate normal distributions").
pub(super) fn threshold(checks: usize) -> f64 {
    let each = -f64::exp_m1(f64::ln_1p(-FAMILY_ERROR) / checks.max(1) as f64);
    -normal_quantile::<Unfused>(each / 2.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn thresholds_grow_with_the_family() {
        // Two-sided quantiles of the normal law at 0.001/m.
        for (checks, expected) in [
            (1, 3.29),
            (20, 4.06),
            (100, 4.42),
            (500, 4.75),
            (1000, 4.89),
        ] {
            assert!(
                (threshold(checks) - expected).abs() < 0.006,
                "{checks}: {}",
                threshold(checks)
            );
        }
    }

    fn check(sample: f64, std_error: f64, bias: Option<f64>) -> Check {
        Check {
            quantity: "S".into(),
            statistic: "mean",
            time: 1.0,
            analytic: 1.0,
            sample,
            std_error,
            bias,
            rounding: ROUNDING,
            source: String::new(),
            claim: None,
        }
    }

    #[test]
    fn a_bias_is_allowed_for_but_not_beyond_its_size() {
        assert!(!check(1.06, 0.01, None).passed(4.0));
        assert!(check(1.06, 0.01, Some(0.025)).passed(4.0));
        assert!(!check(1.08, 0.01, Some(-0.025)).passed(4.0));
        assert!(!check(f64::NAN, 0.01, Some(0.1)).passed(4.0));
    }

    #[test]
    fn without_noise_only_rounding_is_forgiven() {
        assert!(check(1.0 + 1e-12, 0.0, None).passed(4.0));
        assert_eq!(check(1.0 + 1e-12, 0.0, None).z(), 0.0);
        assert!(!check(1.0 + 1e-6, 0.0, None).passed(4.0));
    }
}
