//! Orders of convergence, measured: the slope of an error against the step, with its standard error.

use driftwright_tests::harness::checks::threshold;

/// The mean square error of a scheme with a number of steps, and its standard error.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Level {
    pub(crate) steps: usize,
    pub(crate) square: (f64, f64),
}

/// An order as a test: an estimate with a standard error, to be held against what is claimed.
#[derive(Clone, Debug)]
pub(crate) struct Order {
    pub(crate) what: String,
    pub(crate) slope: f64,
    pub(crate) std_error: f64,
}

/// How many orders the tests of this program hold against claims, for the threshold of each.
const FAMILY: usize = 40;

impl Order {
    /// From three levels, each with twice the steps of the one before, on independent paths.
    ///
    /// A root mean square error `C h^p (1 + d h^q + ...)` has the slope `p + D h^q` between two levels: that of the last
    /// two, less what its distance from the one before says is left, `2^q` times as much each time.
    pub(crate) fn strong(what: &str, levels: &[Level; 3], q: f64) -> Self {
        let [a, b, c] = levels;
        assert!(b.steps == 2 * a.steps && c.steps == 2 * b.steps);
        let logs = levels.map(|l| 0.5 * l.square.0.log2());
        let errors = levels.map(|l| 0.5 * l.square.1 / l.square.0 / std::f64::consts::LN_2);
        let w = 2f64.powf(q);
        // (w (log b - log c) - (log a - log b))/(w - 1)
        let weights = [-1.0, w + 1.0, -w].map(|x| x / (w - 1.0));
        let slope = weights.iter().zip(logs).map(|(w, l)| w * l).sum();
        let square: f64 = weights
            .iter()
            .zip(errors)
            .map(|(w, e)| (w * e).powi(2))
            .sum();
        Self {
            what: what.to_owned(),
            slope,
            std_error: square.sqrt(),
        }
    }

    /// Half the width of the interval that all orders of the tests stay in together.
    pub(crate) fn margin(&self) -> f64 {
        threshold(FAMILY) * self.std_error
    }

    /// Whether the interval holds an order, and is narrow enough to tell it from one a half away.
    pub(crate) fn is(&self, order: f64) -> bool {
        self.margin() < 0.25 && (self.slope - order).abs() <= self.margin()
    }

    #[track_caller]
    pub(crate) fn assert(&self, order: f64) {
        println!(
            "{}: order {:.3} +- {:.3}, claimed {order}",
            self.what,
            self.slope,
            self.margin()
        );
        assert!(self.is(order), "{self:?} is not {order}");
    }
}
