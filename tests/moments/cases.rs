//! The shipped models, where they are observed, and which formulas they are held against.

use driftwright_runtime::{Grid, Run, Simulator};
use driftwright_tests::harness::checks::Check;
use driftwright_tests::harness::laws::Moments;
use driftwright_tests::harness::sums::{mean_powers, uneven};
use driftwright_tests::harness::values::{Values, read};

use crate::{discrete, scalar, systems};

/// A point of the grid.
#[derive(Clone, Copy, Debug)]
pub(crate) struct At {
    /// Time.
    pub(crate) time: f64,
    /// Steps taken so far.
    pub(crate) steps: usize,
    /// Length of a step.
    pub(crate) h: f64,
}

/// Moments by quantity.
pub(crate) type Expected = Vec<(&'static str, Moments)>;

/// A shipped model with its formulas.
#[derive(Clone, Copy)]
pub(crate) struct Case {
    pub(crate) name: &'static str,
    pub(crate) times: [f64; 3],
    /// Equal steps to the last time; none: from observation to observation.
    pub(crate) steps: Option<usize>,
    pub(crate) paths: u64,
    pub(crate) expected: fn(&Values, At) -> Expected,
}

const fn exact(name: &'static str, times: [f64; 3], expected: fn(&Values, At) -> Expected) -> Case {
    Case {
        name,
        times,
        steps: None,
        paths: 1 << 20,
        expected,
    }
}

const fn stepped(
    name: &'static str,
    times: [f64; 3],
    steps: usize,
    expected: fn(&Values, At) -> Expected,
) -> Case {
    Case {
        name,
        times,
        steps: Some(steps),
        paths: 700_000,
        expected,
    }
}

/// Every shipped model but the kelp stock, whose moments need extrapolation.
pub(crate) const CASES: [Case; 23] = [
    exact("harbour_toll", [0.25, 1.0, 3.0], scalar::harbour_toll),
    exact("orchard_spot", [0.25, 1.0, 3.0], scalar::orchard_spot),
    exact("river_spread", [0.2, 1.0, 4.0], scalar::river_spread),
    exact("tide_gauge", [0.2, 0.9, 3.0], scalar::tide_gauge),
    exact("glacier_melt", [0.5, 1.0, 4.0], scalar::glacier_melt),
    exact("salt_price", [0.25, 1.0, 5.0], scalar::salt_price),
    exact("cider_forward", [0.5, 2.0, 4.0], scalar::cider_forward),
    exact("peat_season", [0.3, 1.0, 2.7], scalar::peat_season),
    exact("market_share", [0.5, 2.0, 6.0], scalar::market_share),
    exact("twin_orchards", [0.25, 1.0, 2.0], systems::twin_orchards),
    exact("ferry_currency", [0.5, 2.0, 5.0], systems::ferry_currency),
    exact(
        "barley_two_factor",
        [0.25, 1.0, 4.0],
        systems::barley_two_factor,
    ),
    exact(
        "harbour_account",
        [0.5, 2.0, 10.0],
        systems::harbour_account,
    ),
    exact("cooling_kiln", [0.25, 1.0, 4.0], systems::cooling_kiln),
    stepped("reed_bed", [0.5, 1.0, 4.0], 400, systems::reed_bed),
    exact("hay_moisture", [0.3, 1.0, 2.5], scalar::hay_moisture),
    exact("fog_buoy", [0.25, 1.0, 3.0], scalar::fog_buoy),
    exact("sluice_level", [0.5, 1.0, 2.0], scalar::sluice_level),
    stepped("quay_rate", [0.5, 1.0, 2.0], 64, discrete::quay_rate),
    stepped("honey_market", [0.25, 0.5, 1.0], 64, discrete::honey_market),
    stepped("wool_sale", [0.25, 0.5, 1.0], 8, discrete::wool_sale),
    stepped("eddy_area", [0.5, 1.0, 2.0], 32, discrete::eddy_area),
    stepped("heath_moss", [0.5, 1.0, 2.0], 16, discrete::heath_moss),
];

/// A kelp stock's grid.
pub(crate) const KELP: Case = stepped("kelp_stock", [0.5, 1.0, 2.0], 32, discrete::kelp_stock);

impl Case {
    /// The values of the model's parameters.
    pub(crate) fn values(&self) -> Values {
        Values::from_model_text(&read(&format!("models/{}.toml", self.name)))
    }

    /// Observation times and steps.
    pub(crate) fn grid(&self) -> Grid {
        Grid::new(&self.times, self.steps).expect("a grid")
    }

    /// The expected moments at each time.
    fn expected(&self, values: &Values) -> Vec<Expected> {
        let h = self.times[2] / self.steps.unwrap_or(1) as f64;
        let at = |time: f64| At {
            time,
            steps: (time / h).round() as usize,
            h,
        };
        self.times.map(|t| (self.expected)(values, at(t))).to_vec()
    }

    /// Runs a simulator of the model and compares; `route` says where the simulator comes from.
    pub(crate) fn checks<S: Simulator>(&self, simulator: &S, route: &str, seed: u64) -> Vec<Check> {
        let values = self.values();
        let expected = self.expected(&values);
        let outputs = simulator.shape().outputs;
        let position = |name: &str| {
            outputs
                .iter()
                .position(|output| output == name)
                .unwrap_or_else(|| panic!("{}: no quantity {name}", self.name))
        };
        let mut centres = vec![0.0; outputs.len() * self.times.len()];
        for (time, known) in expected.iter().enumerate() {
            for (name, law) in known {
                centres[time * outputs.len() + position(name)] = law.mean.unwrap_or(0.0);
            }
        }
        let run = Run {
            paths: uneven(self.paths),
            seed,
            ..Run::default()
        };
        let powers = mean_powers(simulator, &self.grid(), &run, centres);
        let mut checks = Vec::new();
        for ((time, known), t) in expected.iter().enumerate().zip(self.times) {
            for (name, law) in known {
                let what = format!("{} ({route}) {name} at {t}", self.name);
                checks.extend(powers[time * outputs.len() + position(name)].checks(&what, law));
            }
        }
        checks
    }

    /// The same for formulas of continuous time and a scheme with a bias of order h: two step sizes on
    /// independent paths extrapolate it away (Talay & Tubaro 1990).
    pub(crate) fn extrapolated<S: Simulator>(
        &self,
        simulator: &S,
        route: &str,
        seed: u64,
    ) -> Vec<Check> {
        let coarse = self.checks(simulator, route, seed);
        let halved = Case {
            steps: self.steps.map(|n| 2 * n),
            ..*self
        };
        let fine = halved.checks(simulator, route, seed + 1);
        let pair = |(a, b): (Check, Check)| Check {
            what: b.what,
            sample: 2.0 * b.sample - a.sample,
            analytic: b.analytic,
            std_error: (4.0 * b.std_error.powi(2) + a.std_error.powi(2)).sqrt(),
        };
        coarse.into_iter().zip(fine).map(pair).collect()
    }
}
