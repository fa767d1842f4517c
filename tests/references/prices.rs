//! Closed-form prices that need only exact laws (reference C): the formula coded here must give the published or
//! recomputed value, and the mean of the simulated discounted payoff must agree with it.

use driftwright_tests::harness::checks::{Check, assert_family};
use driftwright_tests::harness::laws::{black_call, phi};
use driftwright_tests::harness::reference::{Case, Reference};

use crate::estimate::{Estimates, estimate};
use crate::model::{ModelText, POSITIVE};

const PATHS: u64 = 2_000_000;

/// Tests in the making, and how many paths each takes.
struct Book {
    paths: u64,
    checks: Vec<Check>,
}

impl Book {
    fn run(&self, case: &Case, model: &ModelText) -> Estimates {
        estimate(&case.id, model, &[case.parameter("T")], None, self.paths)
    }
}

/// A formula's value against the reference, at the reference's own tolerance.
#[track_caller]
fn close(case: &Case, quantity: &str, value: f64) {
    let expected = case.value(quantity);
    assert!(
        (value - expected).abs() <= 1e-9 * expected.abs().max(1e-3),
        "{} {quantity}: formula {value} against {expected}",
        case.id
    );
}

/// One geometric Brownian motion `S` that grows at `carry`.
fn spot(case: &Case, start: &str, carry: &str) -> ModelText {
    ModelText::new(&["W"]).parameters_of(case).state(
        "X",
        start,
        &format!("({carry})*X"),
        &[("W", "sigma*X")],
        POSITIVE,
    )
}

/// Black & Scholes 1973; Merton 1973 with a yield.
fn vanilla(case: &Case, book: &mut Book) {
    let p = case.values();
    let (t, k) = (p.get("T"), p.get("K"));
    let forward = p.get("S") * ((p.get("r") - p.get("q")) * t).exp();
    let variance = p.get("sigma").powi(2) * t;
    let discount = (-p.get("r") * t).exp();
    let call = discount * black_call(forward, k, variance);
    let d2 = ((forward / k).ln() - variance / 2.0) / variance.sqrt();
    close(case, "call", call);
    close(case, "put", call - discount * (forward - k));
    close(case, "P(S_T>K)", phi(d2));
    let model = spot(case, "S", "r - q")
        .readout("call", "exp(-r*t)*max(X - K, 0)")
        .readout("put", "exp(-r*t)*max(K - X, 0)")
        .readout("above", "max(sign(X - K), 0)");
    let paths = book.run(case, &model);
    book.checks.push(paths.check(0, "call", case.value("call")));
    book.checks.push(paths.check(0, "put", case.value("put")));
    book.checks
        .push(paths.check(0, "above", case.value("P(S_T>K)")));
}

/// Moments and confidence limits of the log-normal law.
fn lognormal(case: &Case, book: &mut Book) {
    let model = spot(case, "S", "mu")
        .derived("log_X", "log(X)")
        .parameter("low", case.value("lower_95"))
        .parameter("high", case.value("upper_95"))
        .parameter("mean", case.value("mean"))
        .parameter("log_mean", case.value("log_mean"))
        .readout("square", "(X - mean)^2")
        .readout("log_square", "(log_X - log_mean)^2")
        .readout("below", "max(sign(low - X), 0)")
        .readout("above", "max(sign(X - high), 0)");
    let paths = book.run(case, &model);
    book.checks.push(paths.check(0, "X", case.value("mean")));
    book.checks
        .push(paths.check(0, "square", case.value("var")));
    book.checks
        .push(paths.check(0, "log_X", case.value("log_mean")));
    book.checks
        .push(paths.check(0, "log_square", case.value("log_sd").powi(2)));
    book.checks.push(paths.check(0, "below", 0.025));
    book.checks.push(paths.check(0, "above", 0.025));
}

/// Black 1976.
fn black76(case: &Case, book: &mut Book) {
    let p = case.values();
    let variance = p.get("sigma").powi(2) * p.get("T");
    let call = (-p.get("r") * p.get("T")).exp() * black_call(p.get("F"), p.get("K"), variance);
    close(case, "call", call);
    let model = spot(case, "F", "0")
        .readout("call", "exp(-r*t)*max(X - K, 0)")
        .readout("put", "exp(-r*t)*max(K - X, 0)");
    let paths = book.run(case, &model);
    book.checks.push(paths.check(0, "call", case.value("call")));
    book.checks.push(paths.check(0, "put", case.value("put")));
}

/// Cash-or-nothing put and gap call (Reiner & Rubinstein 1991, from memory).
fn digital(case: &Case, book: &mut Book) {
    let model = ModelText::new(&["W"]).parameters_of(case).state(
        "Z",
        "S",
        "b*Z",
        &[("W", "sigma*Z")],
        POSITIVE,
    );
    // In the cash put of the source X is the strike and K the cash.
    let payoff = match case.params["kind2"].as_str() {
        Some("cash-put") => "exp(-r*t)*K*max(sign(X - Z), 0)",
        _ => "exp(-r*t)*(Z - X2)*max(sign(Z - X1), 0)",
    };
    let model = model.readout("price", payoff);
    book.checks.push(
        book.run(case, &model)
            .check(0, "price", case.value("price")),
    );
}

/// Two correlated geometric Brownian motions.
fn pair(case: &Case, starts: [&str; 2], carries: [&str; 2]) -> ModelText {
    let mut model = ModelText::new(&["V", "W"]).parameters_of(case);
    model = model.correlated("V", "W", case.parameter("rho"));
    let drifts = carries.map(|c| {
        if c.is_empty() {
            "0".into()
        } else {
            c.to_string()
        }
    });
    model
        .state(
            "A",
            starts[0],
            &format!("({})*A", drifts[0]),
            &[("V", "sigma1*A")],
            POSITIVE,
        )
        .state(
            "B",
            starts[1],
            &format!("({})*B", drifts[1]),
            &[("W", "sigma2*B")],
            POSITIVE,
        )
}

/// Margrabe 1978. The rate drops out: any will do.
fn exchange(case: &Case, book: &mut Book) {
    let p = case.values();
    let t = p.get("T");
    let (s1, s2) = (p.get("sigma1"), p.get("sigma2"));
    let variance = (s1 * s1 + s2 * s2 - 2.0 * p.get("rho") * s1 * s2) * t;
    close(case, "exchange_vol", (variance / t).sqrt());
    let forwards = [("S1", "q1"), ("S2", "q2")].map(|(s, q)| p.get(s) * (-p.get(q) * t).exp());
    close(
        case,
        "exchange_option",
        black_call(forwards[0], forwards[1], variance),
    );
    let model = pair(case, ["S1", "S2"], ["rate - q1", "rate - q2"])
        .parameter("rate", 0.05)
        .readout("swap", "exp(-rate*t)*max(A - B, 0)");
    book.checks.push(
        book.run(case, &model)
            .check(0, "swap", case.value("exchange_option")),
    );
}

/// Spread call on two futures; no closed form, the reference value is by quadrature.
fn spread(case: &Case, book: &mut Book) {
    let model = pair(case, ["F1", "F2"], ["", ""]).readout("call", "exp(-r*t)*max(A - B - K, 0)");
    book.checks.push(
        book.run(case, &model)
            .check(0, "call", case.value("spread_call")),
    );
}

/// Calls and puts on the lesser and the greater of two (Stulz 1982).
fn maxmin(case: &Case, book: &mut Book) {
    let model = pair(case, ["S1", "S2"], ["b1", "b2"])
        .readout("call_on_min", "exp(-r*t)*max(min(A, B) - X, 0)")
        .readout("call_on_max", "exp(-r*t)*max(max(A, B) - X, 0)")
        .readout("put_on_min", "exp(-r*t)*max(X - min(A, B), 0)")
        .readout("put_on_max", "exp(-r*t)*max(X - max(A, B), 0)");
    let paths = book.run(case, &model);
    for quantity in ["call_on_min", "call_on_max", "put_on_min", "put_on_max"] {
        book.checks
            .push(paths.check(0, quantity, case.value(quantity)));
    }
}

/// A foreign asset settled at a fixed exchange rate (Hull 2018, section 30.3, from memory): the drift
/// loses rho*sigma_S*sigma_X.
fn quanto(case: &Case, book: &mut Book) {
    let p = case.values();
    let drift =
        p.get("r_foreign") - p.get("q") - p.get("rho") * p.get("sigma_S") * p.get("sigma_X");
    close(case, "quanto_drift", drift);
    let forward = p.get("S") * (drift * p.get("T")).exp();
    close(case, "quanto_forward", forward);
    let model = ModelText::new(&["W"])
        .parameters_of(case)
        .state(
            "X",
            "S",
            "(r_foreign - q - rho*sigma_S*sigma_X)*X",
            &[("W", "sigma_S*X")],
            POSITIVE,
        )
        .readout("call", "X_fixed*exp(-r_domestic*t)*max(X - K, 0)");
    let paths = book.run(case, &model);
    book.checks
        .push(paths.check(0, "X", case.value("quanto_forward")));
    book.checks
        .push(paths.check(0, "call", case.value("quanto_call")));
}

/// Geometric average over a span (Kemna & Vorst 1990): the log price and its integral are jointly normal.
fn geometric_average(case: &Case, book: &mut Book) {
    let model = ModelText::new(&["W"])
        .parameters_of(case)
        .state("L", "log(S)", "r - q - sigma^2/2", &[("W", "sigma")], "")
        .state("A", "0", "L", &[], "")
        .readout("average", "A/T")
        .readout("call", "exp(-r*T)*max(exp(A/T) - K, 0)")
        .readout("put", "exp(-r*T)*max(K - exp(A/T), 0)");
    let paths = book.run(case, &model);
    book.checks
        .push(paths.check(0, "average", case.value("log_average_mean")));
    book.checks
        .push(paths.check(0, "call", case.value("geometric_asian_call")));
    book.checks
        .push(paths.check(0, "put", case.value("geometric_asian_put")));
}

/// Every value in scope, at a number of paths.
pub(crate) fn checks(paths: u64) -> Vec<Check> {
    let reference = Reference::load("C");
    let mut book = Book {
        paths,
        checks: Vec::new(),
    };
    for case in &reference.case {
        match case.family.as_str() {
            "vanilla" => vanilla(case, &mut book),
            "lognormal" => lognormal(case, &mut book),
            "black76" => black76(case, &mut book),
            "digital" => digital(case, &mut book),
            "exchange" => exchange(case, &mut book),
            "spread" => spread(case, &mut book),
            "maxmin" => maxmin(case, &mut book),
            "quanto" => quanto(case, &mut book),
            "geo_asian" if !case.params.contains_key("n") => {
                geometric_average(case, &mut book);
            }
            _ => {}
        }
    }
    assert_eq!(book.checks.len(), 34, "values in scope");
    book.checks
}

#[test]
fn simulated_payoffs_have_the_published_prices() {
    assert_family(&checks(PATHS));
}
