//! Fine and coarse paths on the same Brownian motion: the strong order of every scheme, and the variance of the levels of
//! antithetic multilevel estimators (Giles & Szpruch 2014).

use std::collections::BTreeMap;

use driftwright_runtime::multilevel::{Coupled, Role};
use driftwright_runtime::{Grid, Run, Simulator};
use driftwright_tests::harness::checks::{Check, assert_family, failures};
use driftwright_tests::harness::interpret::interpreter;
use driftwright_tests::harness::sums::{MeanPowers, mean_powers};

use crate::estimate::estimate;
use crate::model::ModelText;
use crate::orders::{Level, Order};

const PATHS: u64 = 100_000;

/// What a run of coupled paths gave.
struct Levels {
    outputs: Vec<String>,
    powers: Vec<MeanPowers>,
}

impl Levels {
    /// `steps` coarse steps to time 1.
    fn run(model: &ModelText, steps: usize) -> Self {
        let text = model.text("coupled");
        let simulator = interpreter("coupled", &text, &BTreeMap::new());
        let coupled = Coupled::new(&simulator);
        let outputs: Vec<String> = simulator
            .shape()
            .outputs
            .iter()
            .map(ToString::to_string)
            .collect();
        let grid = Grid::new(&[1.0], Some(steps)).expect("a grid");
        let run = Run {
            paths: PATHS,
            seed: steps as u64,
            ..Run::default()
        };
        let centres = vec![0.0; Role::ALL.len() * outputs.len()];
        Self {
            powers: mean_powers(&coupled, &grid, &run, centres),
            outputs,
        }
    }

    fn powers(&self, role: Role, quantity: &str) -> &MeanPowers {
        let place = self.outputs.iter().position(|o| o == quantity);
        let place = place.expect("an observed quantity");
        &self.powers[role as usize * self.outputs.len() + place]
    }

    /// The mean square.
    fn square(&self, role: Role, quantity: &str) -> (f64, f64) {
        let powers = self.powers(role, quantity);
        let [_, second, _, fourth, ..] = powers.means;
        (second, ((fourth - second * second) / powers.count).sqrt())
    }
}

/// The order of the mean square of a quantity's differences, from steps to four times as many.
fn order(what: &str, model: &ModelText, (role, quantity): (Role, &str), steps: usize) -> Order {
    let levels = [steps, 2 * steps, 4 * steps].map(|steps| Level {
        steps,
        square: Levels::run(model, steps).square(role, quantity),
    });
    Order::strong(what, &levels, 1.0)
}

/// One state from 1/2, in one or two independent drivers.
fn scalar(drift: &str, noise: &[&str], more: &str) -> ModelText {
    let drivers = &["W", "B"][..noise.len()];
    let noise: Vec<(&str, &str)> = drivers.iter().copied().zip(noise.iter().copied()).collect();
    ModelText::new(drivers).state("X", "0.5", drift, &noise, more)
}

const POSITIVE: &str = "domain = \"(0, inf)\"";
const CLOSED: &str = "domain = \"[0, inf)\"\nat_edge = \"as_equation\"";
const UNIT: &str = "domain = \"(0, 1)\"";

/// Scheme, drift, noise, further lines, claimed order.
const CASES: [(&str, &str, &[&str], &str, f64); 18] = [
    (
        "euler_maruyama",
        "1.5*(0.2 - X)",
        &["0.6*sqrt(1 + X^2)"],
        "",
        0.5,
    ),
    ("milstein", "1.5*(0.2 - X)", &["0.6*sqrt(1 + X^2)"], "", 1.0),
    ("euler_maruyama", "sin(3*X)", &["0.7"], "", 1.0),
    ("strong_taylor_1_5", "sin(3*X)", &["0.7"], "", 1.5),
    (
        "strong_taylor_1_5",
        "sin(2*X)",
        &["0.5 + 0.4*cos(X)"],
        "",
        1.5,
    ),
    ("milstein", "sin(2*X)", &["0.5*X", "0.4*X"], "", 1.0),
    ("tamed_euler", "X - X^3", &["0.5*X"], "", 0.5),
    ("tamed_milstein", "X - X^3", &["0.5*X"], "", 1.0),
    ("tamed_milstein", "X - X^3", &["0.7"], "", 1.0),
    ("drift_implicit_euler", "X - X^3", &["0.7"], "", 1.0),
    (
        "drift_implicit_euler",
        "2*(0.5 - X)",
        &["0.3*sqrt(X)"],
        POSITIVE,
        1.0,
    ),
    (
        "drift_implicit_euler",
        "2*(0.5 - X)",
        &["0.5*X^(3/4)"],
        POSITIVE,
        1.0,
    ),
    (
        "full_truncation_euler",
        "2*(0.5 - X)",
        &["0.6*sqrt(X)"],
        CLOSED,
        0.5,
    ),
    // Without a request: implicit in the logarithm, the logit and the root.
    ("", "1.2*(0.5 - X)", &["0.6*X"], POSITIVE, 1.0),
    ("", "0.5 - X", &["0.7*X*(1 - X)"], UNIT, 1.0),
    ("", "2*(0.5 - X) - X^2", &["0.5*sqrt(X)"], POSITIVE, 1.0),
    // Explicit in the logarithm and the logit.
    ("", "X*(1 - X/(1 + X))", &["0.5*X/(1 + X)"], POSITIVE, 1.0),
    ("", "X*(1 - X)", &["X*(1 - X)*(1 + X)"], UNIT, 1.0),
];

#[test]
fn strong_orders() {
    for (scheme, drift, noise, more, claimed) in CASES {
        let asked = match scheme {
            "" => more.to_owned(),
            _ => format!("{more}\nscheme = \"{scheme}\""),
        };
        let model = scalar(drift, noise, &asked);
        let what = format!("{scheme}, {drift}, {noise:?}");
        order(&what, &model, (Role::Difference, "X"), 32).assert(claimed);
    }
}

/// Correlated drivers whose noise does not commute, by Milstein's scheme without areas.
fn clashing(scheme: &str) -> ModelText {
    let more = format!("scheme = \"{scheme}\"");
    ModelText::new(&["W", "B"])
        .correlated("W", "B", 0.5)
        .state("X", "0.3", "-X/2", &[("W", "1 + sin(Y)/2")], &more)
        .state("Y", "0", "X/2", &[("B", "cos(X)")], &more)
        .readout("payoff", "sin(X + 2*Y)")
}

#[test]
fn antithetic_pairs() {
    for (scheme, role, claimed) in [
        ("antithetic_milstein", Role::Correction, 1.0),
        ("antithetic_milstein", Role::Difference, 0.5),
        // Euler's twin: its own term of order 1/2 does not change sign.
        ("euler_maruyama", Role::Correction, 0.5),
    ] {
        let what = format!("{scheme}, {role:?}");
        let order = order(&what, &clashing(scheme), (role, "payoff"), 32);
        println!("variance slope {:.3}", -2.0 * order.slope);
        order.assert(claimed);
    }
}

/// Each of the three paths has the law of the simulator on its own grid.
#[test]
fn each_path_has_its_law() {
    let model = clashing("antithetic_milstein");
    let levels = Levels::run(&model, 1);
    let checks = |role: Role, steps: usize| {
        let alone = estimate("alone", &model, &[1.0], Some(steps), 4 * PATHS);
        let mut checks = Vec::new();
        for quantity in ["X", "Y", "payoff"] {
            let (own, other) = (levels.powers(role, quantity), alone.powers(0, quantity));
            for k in [0, 1, 2] {
                let spread = |p: &MeanPowers| (p.means[2 * k + 1] - p.means[k].powi(2)) / p.count;
                checks.push(Check {
                    what: format!("{role:?} {quantity}, power {}", k + 1),
                    sample: own.means[k],
                    analytic: other.means[k],
                    std_error: (spread(own) + spread(other)).sqrt(),
                });
            }
        }
        checks
    };
    let all = [(Role::Fine, 2), (Role::Antithetic, 2), (Role::Coarse, 1)];
    let all = all.map(|(role, steps)| checks(role, steps));
    assert_family(&all.concat());
    // The twin: the law on another grid is another one.
    assert!(!failures(&checks(Role::Fine, 1)).is_empty());
}
