//! Intervals of the real line: ranges of parameters and domains of states.

use std::fmt;

/// An interval; an infinite end is open.
///
/// ```
/// use driftwright_runtime::Interval;
/// let positive = Interval::new(0.0, false, f64::INFINITY, false);
/// assert!(positive.contains(1e-300) && !positive.contains(0.0));
/// assert_eq!(positive.to_string(), "(0, inf)");
/// ```
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Interval {
    /// The lower end.
    pub lower: f64,
    /// Whether the lower end belongs to the interval.
    pub lower_closed: bool,
    /// The upper end.
    pub upper: f64,
    /// Whether the upper end belongs to the interval.
    pub upper_closed: bool,
}

impl Interval {
    /// The interval from `lower` to `upper`.
    #[must_use]
    pub const fn new(lower: f64, lower_closed: bool, upper: f64, upper_closed: bool) -> Self {
        Interval {
            lower,
            lower_closed,
            upper,
            upper_closed,
        }
    }

    /// Whether a finite number lies in the interval. Infinite values and NaN never do.
    #[must_use]
    pub fn contains(&self, value: f64) -> bool {
        let above = value > self.lower || (self.lower_closed && value == self.lower);
        let below = value < self.upper || (self.upper_closed && value == self.upper);
        value.is_finite() && above && below
    }
}

impl fmt::Display for Interval {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let open = if self.lower_closed { '[' } else { '(' };
        let close = if self.upper_closed { ']' } else { ')' };
        write!(f, "{open}{}, {}{close}", self.lower, self.upper)
    }
}
