//! Equations without noise at closed ends, against their solutions: what absorbs, what reflects, what is counted,
//! and which claims stay open.

use std::collections::BTreeMap;

use driftwright::analysis::claims::Verdict;
use driftwright_runtime::collect::Paths;
use driftwright_runtime::{Failures, Grid, Run, simulate};
use driftwright_tests::harness::interpret::{compiled, interpreter};

/// Times of observation, and steps to the last.
const TIMES: [f64; 3] = [0.1, 0.2, 1.0];
const STEPS: usize = 20_000;

/// A state without noise.
fn text(initial: &str, drift: &str, more: &str) -> String {
    format!(
        "[model]\nname = \"m\"\n[states.X]\ninitial = \"{initial}\"\ndrift = \"{drift}\"\n{more}\n"
    )
}

/// The state at [`TIMES`], and how many of the paths are counted.
fn run(text: &str) -> ([f64; 3], Failures) {
    let run = Run {
        paths: 2,
        ..Run::default()
    };
    let grid = Grid::new(&TIMES, Some(STEPS)).expect("a sound grid");
    let simulator = interpreter("ends", text, &BTreeMap::new());
    let outcome = simulate(&simulator, &grid, &run, Paths).expect("a sound run");
    let at = |time| outcome.output.get(1, time, 0);
    ([at(0), at(1), at(2)], outcome.failures)
}

fn close(found: [f64; 3], expected: [f64; 3], tolerance: f64) {
    for (x, y) in found.into_iter().zip(expected) {
        assert!((x - y).abs() <= tolerance, "{found:?} against {expected:?}");
    }
}

/// `X' = -3(1 - X)` from 1/2 is `1 - exp(3t)/2` until log(2)/3 = 0.231, when it comes to 0.
#[test]
fn a_loss_to_an_absorbing_end() {
    let falling = |t: f64| 1.0 - 0.5 * (3.0 * t).exp();
    let absorbed = text(
        "0.5",
        "-3*(1 - X)",
        "domain = \"[0, inf)\"\nat_edge = \"absorb\"",
    );
    let (found, failures) = run(&absorbed);
    close(found, [falling(0.1), falling(0.2), 0.0], 1e-3);
    assert_eq!(found[2], 0.0);
    assert_eq!(failures, Failures::default());
    let open = text("0.5", "-3*(1 - X)", "domain = \"(0, inf)\"");
    let (found, failures) = run(&open);
    close(found, TIMES.map(falling), 1e-9);
    assert_eq!(failures.left_domain, 2);
}

/// `X' = -1 - X^2` from tan(1/2) is `tan(1/2 - t)`; its exact solution is not a linear equation's.
#[test]
fn a_steepening_loss() {
    let tangent = |t: f64| (0.5 - t).tan();
    let (initial, drift) = (format!("{:?}", tangent(0.0)), "-1 - X^2");
    let ruled = |rule: &str| {
        let more = format!("domain = \"[0, inf)\"\nat_edge = \"{rule}\"");
        run(&text(&initial, drift, &more))
    };
    let (found, failures) = ruled("absorb");
    close(found, [tangent(0.1), tangent(0.2), 0.0], 1e-3);
    assert_eq!(failures, Failures::default());
    // Folded back at each step, it stays within a step's drift of the end.
    let (found, failures) = ruled("reflect");
    close(found, [tangent(0.1), tangent(0.2), 0.0], 1e-3);
    assert_eq!(failures, Failures::default());
    // Runge-Kutta goes on beyond an open end, and says so.
    let (found, failures) = run(&text(&initial, drift, "domain = \"(0, inf)\""));
    close(found, TIMES.map(tangent), 1e-9);
    assert_eq!(failures.left_domain, 2);
}

/// Both ends reflect, and a step leads across the whole domain: the value stays inside.
#[test]
fn a_step_across_the_whole_domain() {
    let more = "domain = \"[0, 1]\"\nat_edge = \"reflect\"\nscheme = \"euler_maruyama\"";
    let (found, failures) = run(&text("0.5", "1e6", more));
    assert!(found.iter().all(|x| (0.0..=1.0).contains(x)), "{found:?}");
    assert_eq!(failures, Failures::default());
    let mixed = "domain = \"[0, 1]\"\nat_edge = { lower = \"absorb\", upper = \"reflect\" }";
    let (found, failures) = run(&text("0.5", "1e6", mixed));
    assert_eq!((found, failures), ([0.0; 3], Failures::default()));
}

/// `X' = 1 - X^2` from 1/2 is `tanh(t + atanh(1/2))`, `X' = -1 - X^2` is `tan(atan(1/2) - t)`. In 1/X the lower end
/// is the upper one; where `m` may have either sign it is not known what values 1/X takes.
#[test]
fn an_end_in_a_coordinate_that_falls() {
    let text = |drift: &str, range: &str, rule: &str| {
        format!(
            "[model]\nname = \"m\"\n[parameters]\nm = {{ value = 0.1{range} }}\n[states.X]\ninitial = \"0.5\"\n\
             drift = \"{drift}\"\ndomain = \"[m, inf)\"\nthrough = \"1/X\"\nat_edge = \"{rule}\"\n"
        )
    };
    let positive = ", range = \"(0, inf)\"";
    let rising = |t: f64| (t + 0.5_f64.atanh()).tanh();
    let (found, failures) = run(&text("1 - X^2", positive, "absorb"));
    close(found, TIMES.map(rising), 1e-3);
    assert_eq!(failures, Failures::default());
    let falling = |t: f64| (0.5_f64.atan() - t).tan();
    let (found, failures) = run(&text("-1 - X^2", positive, "absorb"));
    close(found, [falling(0.1), falling(0.2), 0.1], 1e-3);
    assert_eq!(failures, Failures::default());
    let (found, failures) = run(&text("-1 - X^2", "", "as_equation"));
    assert!(found[2] < 0.1 && failures.left_domain == 2, "{found:?}");
}

/// A mean is proved where the equation holds at all times, and open where an end stops it.
#[test]
fn claims_beyond_an_end_stay_open() {
    let verdict = |initial: &str, drift: &str, mean: &str, more: &str| {
        let claim = format!("[claims]\nm = {{ mean_of = \"X\", is = \"{mean}\" }}\n");
        let text = text(initial, drift, more) + &claim;
        compiled("ends", &text).claims[0].verdict
    };
    let absorb = "domain = \"[0, inf)\"\nat_edge = \"absorb\"";
    let falling = "1 - exp(3*t)/2";
    for more in [absorb, "domain = \"(0, inf)\"", "domain = \"[0, inf)\""] {
        assert_eq!(verdict("0.5", "-3*(1 - X)", falling, more), Verdict::Open);
    }
    assert_eq!(verdict("0.5", "-3*(1 - X)", falling, ""), Verdict::Proved);
    let rising = |initial, mean, more| verdict(initial, "3*(1 - X)", mean, more);
    assert_eq!(rising("0.5", "1 - exp(-3*t)/2", absorb), Verdict::Proved);
    // Absorbed where it starts, it stays there.
    assert_eq!(rising("0", "1 - exp(-3*t)", absorb), Verdict::Open);
    assert_eq!(
        rising("0", "1 - exp(-3*t)", "domain = \"[0, inf)\""),
        Verdict::Proved
    );
}
