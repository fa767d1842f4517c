//! The drift-implicit scheme: its own discrete moments on a linear equation, its order, and the moments of equations on the
//! half line from two step sizes (Talay & Tubaro 1990), where the drift is steep near 0 and no step may leave.

use driftwright_tests::harness::checks::{Check, assert_family};
use driftwright_tests::harness::reference::Reference;

use crate::estimate::estimate;
use crate::model::{ModelText, POSITIVE};

const IMPLICIT: &str = "scheme = \"drift_implicit_euler\"";

/// With additive noise a step of the Ornstein-Uhlenbeck process is `(X + k th h + sg dW)/(1 + k h)`. Beside it runs the exact
/// process on the same driver: halving the step halves the distance (strong order 1).
#[test]
fn linear_equation() {
    let reference = Reference::load("E");
    let case = reference.by_id("E-additive-ou-a");
    let p = case.values();
    let model = ModelText::new(&["W"])
        .parameters_of(case)
        .state("X", "x0", "k*(th - X)", &[("W", "sg")], IMPLICIT)
        .state("Y", "x0", "k*(th - Y)", &[("W", "sg")], "")
        .readout("miss", "(X - Y)^2");
    let t = case.parameter("T");
    let run = |steps: usize| {
        let name = format!("implicit-ou-{steps}");
        estimate(&name, &model, &[t], Some(steps), 500_000)
    };
    let mut checks = Vec::new();
    let mut misses = Vec::new();
    for steps in [16_usize, 32] {
        let h = t / steps as f64;
        let keep = 1.0 / (1.0 + p.get("k") * h);
        let (mut mean, mut variance) = (p.get("x0"), 0.0);
        for _ in 0..steps {
            mean = keep * (mean + p.get("k") * p.get("th") * h);
            variance = keep * keep * (variance + p.get("sg").powi(2) * h);
        }
        let paths = run(steps);
        checks.push(paths.check(0, "X", mean));
        checks.push(paths.variance_check(0, "X", variance));
        misses.push(paths.mean(0, "miss").0.sqrt());
        // Explicit Euler's variance is another one.
        let explicit = 1.0 - p.get("k") * h;
        let (mut other, mut step) = (0.0, 0);
        while step < steps {
            other = explicit * explicit * other + p.get("sg").powi(2) * h;
            step += 1;
        }
        assert!(!paths.variance_check(0, "X", other).passes(6.0));
    }
    assert_family(&checks);
    let order = (misses[0] / misses[1]).log2();
    assert!((0.9..1.1).contains(&order), "{order}");
}

/// Means, and second moments where the equation gives them in closed form: the drift is linear, so that the mean is
/// `m + (x0 - m) exp(-k t)`; the variance of the square-root process by Cox, Ingersoll & Ross 1985, equation 19.
#[test]
fn half_line() {
    let (k, m, s, x0, t) = (1.5_f64, 0.6_f64, 0.5_f64, 0.9_f64, 1.0_f64);
    let left = (-k * t).exp();
    let mean = m + (x0 - m) * left;
    let square_root = s * s * (1.0 - left) / k * (x0 * left + m / 2.0 * (1.0 - left));
    // E[X^2]' = (s^2 - 2 k) E[X^2] + 2 k m E[X] for noise s X.
    let rate = s * s - 2.0 * k;
    let (constant, falling) = (
        -2.0 * k * m * m / rate,
        2.0 * k * m * (x0 - m) / (-k - rate),
    );
    let second = constant + falling * left + (x0 * x0 - constant - falling) * (rate * t).exp();
    let mut checks = Vec::new();
    for (name, noise, square) in [
        ("root", "s*sqrt(X)", Some(square_root + mean * mean)),
        ("elastic", "s*X^(7/10)", None),
        ("linear", "s*X", Some(second)),
    ] {
        let more = format!("{POSITIVE}\n{IMPLICIT}");
        let mut model = ModelText::new(&["W"]).positive(&["k", "m", "s", "x0"]);
        for (name, value) in [("k", k), ("m", m), ("s", s), ("x0", x0)] {
            model = model.parameter(name, value);
        }
        model = model
            .assumption("4*k*m > s^2")
            .state("X", "x0", "k*(m - X)", &[("W", noise)], &more)
            .readout("square", "X^2");
        let run = |steps: usize| {
            let name = format!("implicit-{name}-{steps}");
            estimate(&name, &model, &[t], Some(steps), 400_000)
        };
        let (coarse, fine) = (run(32), run(64));
        let known = [("X", Some(mean)), ("square", square)];
        for (quantity, analytic) in known {
            let Some(analytic) = analytic else { continue };
            let [a, b] = [&coarse, &fine].map(|paths| paths.check(0, quantity, analytic));
            checks.push(Check {
                sample: 2.0 * b.sample - a.sample,
                std_error: 2.0 * b.std_error + a.std_error,
                ..b
            });
        }
    }
    assert_eq!(checks.len(), 5);
    assert_family(&checks);
}
