//! Milstein's scheme with Levy areas: the law of the area that two correlated drivers sweep, and strong order 1 where the
//! noise does not commute.

use std::collections::BTreeMap;

use driftwright_runtime::collect::Paths;
use driftwright_runtime::{Grid, Run, simulate};
use driftwright_tests::harness::checks::{Check, assert_family, failures};
use driftwright_tests::harness::interpret::interpreter;
use driftwright_tests::harness::reference::Reference;

use crate::estimate::{Estimates, estimate_from};
use crate::model::ModelText;
use crate::orders::{Level, Order};

const RHO: f64 = -0.6;
const MILSTEIN: &str = "scheme = \"milstein\"";
const EULER: &str = "scheme = \"euler_maruyama\"";

/// Two Brownian motions, the area `A` they sweep, and `Z` with `Z = exp(c A)` (Ito's rule: `d<A> = (X^2 - 2 rho X Y +
/// Y^2)/4 dt`), whose noise does not commute.
fn model(of_area: &str, of_image: &str) -> ModelText {
    ModelText::new(&["W", "B"])
        .parameter("c", 0.5)
        .parameter("rho", RHO)
        .correlated("W", "B", RHO)
        .state("X", "0", "0", &[("W", "1")], "")
        .state("Y", "0", "0", &[("B", "1")], "")
        .state("A", "0", "0", &[("W", "-Y/2"), ("B", "X/2")], of_area)
        .state(
            "Z",
            "1",
            "c^2*(X^2 - 2*rho*X*Y + Y^2)/8*Z",
            &[("W", "-c*Y*Z/2"), ("B", "c*X*Z/2")],
            of_image,
        )
        .readout("square", "A^2")
        .readout("mixed", "A^2*X^2")
        .readout("crossed", "A^2*X*Y")
        .readout("fourth", "A^4")
        .readout("miss", "(Z - exp(c*A))^2")
}

fn run(of_area: &str, of_image: &str, steps: usize, paths: u64) -> Estimates {
    let name = format!("areas-{steps}");
    let model = model(of_area, of_image);
    estimate_from(steps as u64, &name, &model, &[1.0], Some(steps), paths)
}

/// Over a unit of time: variance `(1 - rho^2)/4`, and `(1 - rho^2) (1 + |x|^2)/12` given the increments `x` of two
/// independent drivers behind the correlated ones (Levy 1951; Wiktorsson 2001), so that the square times products of
/// `X = x_1` and `Y = rho x_1 + sqrt(1 - rho^2) x_2` has the means below.
fn laws(paths: &Estimates, given: bool, spread: f64) -> Vec<Check> {
    let mut checks = vec![
        paths.check(0, "A", 0.0),
        paths.check(0, "square", spread / 4.0),
    ];
    if given {
        checks.push(paths.check(0, "mixed", spread * 5.0 / 12.0));
        checks.push(paths.check(0, "crossed", spread * RHO * 5.0 / 12.0));
    } else {
        // The density is 1/cosh(pi x): kurtosis 5 (Levy 1951).
        checks.push(paths.check(0, "fourth", 5.0 / 16.0 * spread * spread));
    }
    checks
}

#[test]
fn the_area_of_correlated_drivers() {
    let spread = 1.0 - RHO * RHO;
    let (one, many) = (
        run(MILSTEIN, MILSTEIN, 1, 1_000_000),
        run(MILSTEIN, MILSTEIN, 16, 1_000_000),
    );
    let checks = |spread| [laws(&one, true, spread), laws(&many, false, spread)].concat();
    assert_family(&checks(spread));
    // Twins: areas of independent drivers, and Euler's scheme, which has none.
    assert!(!failures(&checks(1.0)).is_empty());
    let euler = laws(&run(EULER, MILSTEIN, 16, 1_000_000), false, spread);
    assert!(!failures(&euler).is_empty());
}

/// Mean square errors of Euler's scheme and of Milstein's without areas on `dJ = X dB` (Clark & Cameron 1980), and the
/// distribution function of the area (Levy 1951), both in reference E.
#[test]
fn areas_left_out_and_the_law_of_those_drawn() {
    let reference = Reference::load("E");
    let case = reference.by_id("E-clark-cameron-T1");
    let sum = |model: ModelText, name: &str, scheme: &str| {
        let more = format!("scheme = \"{scheme}\"");
        model.state(name, "0", "0", &[("B", "X")], &more)
    };
    let mut model = ModelText::new(&["W", "B"]).state("X", "0", "0", &[("W", "1")], "");
    model = sum(model, "J", "milstein");
    model = sum(model, "E", "euler_maruyama");
    model = sum(model, "M", "antithetic_milstein");
    model = model
        .readout("euler", "(J - E)^2")
        .readout("without", "(J - M)^2");
    let mut checks = Vec::new();
    for (quantity, own) in [
        ("mse_euler", "euler"),
        ("mse_best_given_increments", "without"),
    ] {
        for (steps, value) in case.values_at(quantity).take(4) {
            let steps = Some(steps as usize);
            let paths = estimate_from(5, "clark-cameron", &model, &[1.0], steps, 200_000);
            checks.push(paths.check(0, own, value));
        }
    }
    for id in ["E-levy-area-h1", "E-levy-area-h0.01"] {
        let case = reference.by_id(id);
        let mut model = ModelText::new(&["W", "B"])
            .state("X", "0", "0", &[("W", "1")], "")
            .state("Y", "0", "0", &[("B", "1")], "")
            .state("A", "0", "0", &[("W", "-Y/2"), ("B", "X/2")], MILSTEIN);
        let points: Vec<(f64, f64)> = case.values_at("cdf_A").collect();
        for (index, (x, _)) in points.iter().enumerate() {
            let formula = format!("max(sign({x:?} - A), 0)");
            model = model.readout(&format!("below_{index}"), &formula);
        }
        let paths = estimate_from(6, id, &model, &[case.parameter("h")], Some(16), 500_000);
        for (index, (_, value)) in points.iter().enumerate() {
            checks.push(paths.check(0, &format!("below_{index}"), *value));
        }
    }
    assert_eq!(checks.len(), 16);
    assert_family(&checks);
}

/// `A` is exact at the points of the grid, given increments and areas, so that it is the solution on the same path.
fn order(what: &str, of_area: &str, of_image: &str) -> Order {
    let levels = [32, 64, 128].map(|steps| Level {
        steps,
        square: run(of_area, of_image, steps, 200_000).mean(0, "miss"),
    });
    Order::strong(what, &levels, 1.0)
}

#[test]
fn strong_order_one() {
    order("Milstein with areas", MILSTEIN, MILSTEIN).assert(1.0);
    // Twins: areas left out of the scheme, or of the solution.
    let euler = order("Euler", MILSTEIN, EULER);
    euler.assert(0.5);
    let without = order("areas left out", EULER, MILSTEIN);
    assert!(!without.is(1.0), "{without:?}");
}

/// Neither threads nor parts of a run are seen in a path.
#[test]
fn threads_and_parts() {
    let text = model(MILSTEIN, MILSTEIN).text("areas");
    let simulator = interpreter("areas", &text, &BTreeMap::new());
    let grid = Grid::new(&[1.0], Some(3)).expect("a grid");
    let paths = |first_path, paths, threads| {
        let run = Run {
            first_path,
            paths,
            threads,
            ..Run::default()
        };
        let outcome = simulate(&simulator, &grid, &run, Paths).expect("a sound run");
        move |path: usize| outcome.output.get(path, 0, 3).to_bits()
    };
    let (whole, threaded, part) = (paths(0, 900, 1), paths(0, 900, 2), paths(700, 100, 1));
    for path in 0..900 {
        assert_eq!(whole(path), threaded(path));
    }
    for path in 0..100 {
        assert_eq!(whole(700 + path), part(path));
    }
}
