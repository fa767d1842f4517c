//! Families of z-tests: each sample statistic with its standard error, one threshold for all.

use std::fmt;

use statrs::distribution::ContinuousCDF;

use super::laws::standard_normal;

/// The chance that a family of true hypotheses fails by sampling alone.
pub const FAMILY_ERROR: f64 = 0.001;

/// Differences below this, relative to the value, are rounding.
const ROUNDING: f64 = 1e-9;

/// A sample statistic beside its analytic value.
#[derive(Clone, Debug)]
pub struct Check {
    /// What is compared, for the message.
    pub what: String,
    /// Value from the paths.
    pub sample: f64,
    /// Value from the formula.
    pub analytic: f64,
    /// Standard error of the sample value; 0 where the paths agree.
    pub std_error: f64,
}

impl Check {
    /// The difference in standard errors; 0 where it is rounding.
    #[must_use]
    pub fn z(&self) -> f64 {
        let difference = self.sample - self.analytic;
        if difference.abs() <= ROUNDING * (self.analytic.abs() + f64::MIN_POSITIVE) {
            return 0.0;
        }
        difference / self.std_error
    }

    /// Whether the difference stays under the threshold. A value that is not a number does not.
    #[must_use]
    pub fn passes(&self, threshold: f64) -> bool {
        self.z().abs() <= threshold
    }
}

impl fmt::Display for Check {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "{}: sample {} against {} (standard error {:.3e}, z {:.2})",
            self.what,
            self.sample,
            self.analytic,
            self.std_error,
            self.z()
        )
    }
}

/// The two-sided threshold for |z| at which `tests` independent tests fail together with
/// chance [`FAMILY_ERROR`] (Sidak 1967).
#[must_use]
pub fn threshold(tests: usize) -> f64 {
    let single = -((-FAMILY_ERROR).ln_1p() / tests as f64).exp_m1();
    standard_normal().inverse_cdf(1.0 - single / 2.0)
}

/// Panics with every check over the threshold of the family; returns the threshold.
///
/// # Panics
/// If the family is empty or a check does not pass.
#[track_caller]
pub fn assert_family(checks: &[Check]) -> f64 {
    assert!(!checks.is_empty(), "a family without tests shows nothing");
    let limit = threshold(checks.len());
    let failed: Vec<String> = failures(checks).iter().map(ToString::to_string).collect();
    assert!(
        failed.is_empty(),
        "{} of {} tests beyond |z| = {limit:.2}:\n{}",
        failed.len(),
        checks.len(),
        failed.join("\n")
    );
    limit
}

/// The checks of a family that do not pass.
#[must_use]
pub fn failures(checks: &[Check]) -> Vec<&Check> {
    let limit = threshold(checks.len());
    checks.iter().filter(|c| !c.passes(limit)).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn thresholds_are_those_of_normal_tables() {
        // 1 - 0.0005 has the quantile 3.2905 (Abramowitz & Stegun 1964, table 26.1).
        assert!((threshold(1) - 3.2905).abs() < 5e-4);
        assert!((threshold(20) - 4.056).abs() < 2e-3);
        assert!((threshold(1000) - 4.892).abs() < 2e-3);
    }

    #[test]
    fn a_number_that_is_none_fails() {
        let check = Check {
            what: "nothing".into(),
            sample: f64::NAN,
            analytic: 1.0,
            std_error: 1.0,
        };
        assert!(!check.passes(1e9));
    }
}
