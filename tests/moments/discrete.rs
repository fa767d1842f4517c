//! Analytic moments of the models without an exact law. A scheme is held against its own exact
//! discrete moments, which its recursion gives in closed form, so that no bias of discretisation can hide
//! a wrong term; that they tend to the moments of the literature as the step shrinks is a test below.

use driftwright_tests::harness::laws::*;
use driftwright_tests::harness::values::Values;

use crate::cases::{At, Expected};

/// Drift and noise of a square-root process.
struct SquareRoot {
    kappa: f64,
    theta: f64,
    xi: f64,
}

impl SquareRoot {
    /// Euler's step of mean and second moment of v, truncation aside (the parameters keep v positive).
    fn step(&self, mean: f64, second: f64, h: f64) -> (f64, f64) {
        let (keep, push) = (1.0 - self.kappa * h, self.kappa * self.theta * h);
        (
            keep * mean + push,
            keep * keep * second
                + 2.0 * keep * push * mean
                + push * push
                + self.xi * self.xi * h * mean,
        )
    }
}

/// A square-root process drawn exactly, with its integral by the trapezoidal rule: mean and second moment of both.
/// Mean and variance over a step are those of Cox, Ingersoll & Ross (1985, equation 19).
fn drawn(process: &SquareRoot, start: f64, at: At) -> [f64; 4] {
    let keep = (-process.kappa * at.h).exp();
    let push = process.theta * (1.0 - keep);
    let spread = process.xi * process.xi * (1.0 - keep) / process.kappa;
    let (mut mean, mut second) = (start, start * start);
    let (mut integral, mut integral_2, mut mixed) = (0.0, 0.0, 0.0);
    for _ in 0..at.steps {
        // The next value, its product with this one, its square, its product with the integral so far.
        let next = keep * mean + push;
        let product = keep * second + push * mean;
        let next_second = keep * product + push * next + spread * (keep * mean + push / 2.0);
        let with_next = keep * mixed + push * integral;
        integral_2 +=
            at.h * (mixed + with_next) + at.h * at.h / 4.0 * (second + 2.0 * product + next_second);
        mixed = with_next + at.h / 2.0 * (product + next_second);
        integral += at.h / 2.0 * (mean + next);
        (mean, second) = (next, next_second);
    }
    [mean, second, integral, integral_2]
}

/// A price whose variance is a square-root process, with the integral of that; the scheme keeps the mean of the
/// price (Andersen 2008, section 4.3).
pub(crate) fn wool_sale(p: &Values, at: At) -> Expected {
    let process = SquareRoot {
        kappa: p.get("kappa"),
        theta: p.get("theta"),
        xi: p.get("xi"),
    };
    let [mean, second, integral, integral_2] = drawn(&process, p.get("v0"), at);
    vec![
        (
            "F",
            Moments::mean(p.get("F0") * (p.get("r") * at.time).exp()),
        ),
        ("v", Moments::two(mean, second - mean * mean)),
        (
            "I",
            Moments::two(integral, integral_2 - integral * integral),
        ),
    ]
}

/// A square-root rate with its integral. The mean of exp(a r) after a step is that of a noncentral chi-square
/// variable (Johnson, Kotz & Balakrishnan 1995, section 29.3), exponentially affine in the
/// rate before it, so that the mean of exp(b I) follows backwards.
pub(crate) fn quay_rate(p: &Values, at: At) -> Expected {
    let (kappa, theta, sigma) = (p.get("kappa"), p.get("theta"), p.get("sigma"));
    let r0 = p.get("r0");
    let process = SquareRoot {
        kappa,
        theta,
        xi: sigma,
    };
    let [mean, second, integral, integral_2] = drawn(&process, r0, at);
    let keep = (-kappa * at.h).exp();
    let window = (1.0 - keep) / kappa;
    let (scale, freedom) = (
        sigma * sigma * window / 4.0,
        4.0 * kappa * theta / (sigma * sigma),
    );
    let affine = |b: f64| {
        let (mut slope, mut constant) = (b * at.h / 2.0, 0.0_f64);
        for step in 0..at.steps {
            let shrink = 1.0 - 2.0 * slope * scale;
            constant -= freedom / 2.0 * shrink.ln();
            let weight = if step + 1 == at.steps { 0.5 } else { 1.0 };
            slope = slope * keep / shrink + weight * b * at.h;
        }
        (constant + slope * r0).exp()
    };
    let mut known = vec![
        ("r", Moments::two(mean, second - mean * mean)),
        (
            "I",
            Moments::two(integral, integral_2 - integral * integral),
        ),
        (
            "discount",
            Moments::from_raw([affine(-1.0), affine(-2.0), affine(-3.0)]),
        ),
    ];
    known.push(("square_rate", Moments::mean(second)));
    known
}

/// Log-Euler with square-root variance: E\[S^k\] is exponentially affine in the variance, step by step
/// (Heston 1993, section 1, for the continuous case).
pub(crate) fn honey_market(p: &Values, at: At) -> Expected {
    let (r, rho, h) = (p.get("r"), p.get("rho"), at.h);
    let process = SquareRoot {
        kappa: p.get("kappa"),
        theta: p.get("theta"),
        xi: p.get("xi"),
    };
    let power = |k: f64| {
        let (mut slope, mut constant) = (0.0_f64, k * p.get("S0").ln());
        for _ in 0..at.steps {
            constant += k * r * h + slope * process.kappa * process.theta * h;
            slope = slope * (1.0 - process.kappa * h) - k * h / 2.0
                + h / 2.0
                    * (k * k + 2.0 * k * slope * process.xi * rho + (slope * process.xi).powi(2));
        }
        (constant + slope * p.get("v0")).exp()
    };
    let (v, v2, log, log_2) = log_price(&process, p, at);
    vec![
        ("S", Moments::from_raw([power(1.0), power(2.0), power(3.0)])),
        ("v", Moments::two(v, v2 - v * v)),
        ("log_S", Moments::two(log, log_2 - log * log)),
    ]
}

/// E\[v\], E\[v^2\], E\[log S\], E\[(log S)^2\] under Euler's scheme, from the recursion of the joint moments.
fn log_price(process: &SquareRoot, p: &Values, at: At) -> (f64, f64, f64, f64) {
    let (r, rho, h) = (p.get("r"), p.get("rho"), at.h);
    let (mut v, mut l) = (p.get("v0"), p.get("S0").ln());
    let (mut vv, mut lv, mut ll) = (v * v, l * v, l * l);
    for _ in 0..at.steps {
        let (keep, push) = (1.0 - process.kappa * h, process.kappa * process.theta * h);
        // (l + r h - v h/2 + sqrt(v) dW)^2 and its product with the next v.
        ll += 2.0 * r * h * l - h * lv + r * r * h * h - r * h * h * v + vv * h * h / 4.0 + v * h;
        lv = keep * (lv + r * h * v - h * vv / 2.0)
            + push * (l + r * h - h * v / 2.0)
            + rho * process.xi * h * v;
        l += r * h - h * v / 2.0;
        (v, vv) = process.step(v, vv, h);
    }
    (v, vv, l, ll)
}

/// Levy's area, exact in its first two moments at any step: c^4 T^2/4 (Levy 1951).
pub(crate) fn eddy_area(p: &Values, at: At) -> Expected {
    let c2 = p.get("c").powi(2);
    let area = (c2 * at.time).powi(2) / 4.0;
    let position = normal(0.0, c2 * at.time);
    // X^2 + Y^2 is exponential with mean 2 c^2 t (Johnson, Kotz & Balakrishnan 1994, section 19.1).
    let scale = 2.0 * c2 * at.time;
    vec![
        ("X", position),
        ("Y", position),
        ("A", Moments::all(0.0, area, 0.0)),
        ("distance_2", Moments::all(scale, scale * scale, 2.0)),
    ]
}

/// Gene frequencies by Euler's scheme, before 0 or 1 is within reach: the mean stays, p(1 - p) decays by
/// 1 - s^2 h a step (Kimura 1955 has exp(-s^2 t)).
pub(crate) fn heath_moss(p: &Values, at: At) -> Expected {
    let (p0, s) = (p.get("p0"), p.get("s"));
    let mixed = p0 * (1.0 - p0) * (1.0 - s * s * at.h).powi(at.steps as i32);
    vec![
        ("p", Moments::two(p0, p0 * (1.0 - p0) - mixed)),
        ("mixed", Moments::mean(mixed)),
    ]
}

/// Logistic growth: the reciprocal obeys dY = (r/K - (r - s^2) Y) dt - s Y dW, whose first two moments solve
/// linear equations (Kloeden & Platen 1992, section 4.4, reducible equations). Continuous time: the test
/// extrapolates over the step.
pub(crate) fn kelp_stock(p: &Values, at: At) -> Expected {
    let (r, s2) = (p.get("r"), p.get("sigma").powi(2));
    let (feed, y0) = (r / p.get("K"), 1.0 / p.get("X0"));
    let (a, b) = (r - s2, 2.0 * r - 3.0 * s2);
    let level = feed / a;
    let mean = level + (y0 - level) * (-a * at.time).exp();
    // m2' = 2 feed m1 - b m2, m1 = level + (y0 - level) exp(-a t).
    let fading = ((-a * at.time).exp() - (-b * at.time).exp()) / (b - a);
    let second = y0 * y0 * (-b * at.time).exp()
        + 2.0 * feed * (level * decayed(b, at.time) + (y0 - level) * fading);
    vec![("scarcity", Moments::two(mean, second - mean * mean))]
}
