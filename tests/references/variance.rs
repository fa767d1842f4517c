//! Prices under square-root variance (reference C: Broadie & Kaya 2006; Andersen 2008, cases I to III) by the normal law
//! given the variance, which is drawn exactly or by its moments, and what the bias is as the step shrinks.

use driftwright_tests::harness::checks::{Check, assert_family, failures};
use driftwright_tests::harness::reference::{Case, Reference};

use crate::estimate::{Estimates, estimate};
use crate::model::{ModelText, POSITIVE};

const PATHS: u64 = 1_000_000;

/// The model of a case, with a call for each strike and the variance collected.
fn model(case: &Case, rho: f64, more: &str) -> ModelText {
    let variance = format!("domain = \"[0, inf)\"\nat_edge = \"as_equation\"\n{more}");
    let price = format!("{POSITIVE}\nthrough = \"log(X)\"");
    let mut model = ModelText::new(&["W", "B"])
        .parameters_of(case)
        .positive(&["kappa", "theta", "eps"])
        .correlated("W", "B", rho)
        .state("X", "S", "r*X", &[("W", "sqrt(V)*X")], &price)
        .state(
            "V",
            "v0",
            "kappa*(theta - V)",
            &[("B", "eps*sqrt(V)")],
            &variance,
        )
        .state("I", "0", "V", &[], "")
        .readout("grown", "exp(-r*t)*X");
    for (name, strike, _) in strikes(case) {
        model = model.readout(&name, &format!("exp(-r*t)*max(X - {strike:?}, 0)"));
    }
    model
}

/// Calls by name, strike and price.
fn strikes(case: &Case) -> Vec<(String, f64, f64)> {
    let named = |(strike, price)| (format!("call_{strike:.0}"), strike, price);
    case.values_at("call").map(named).collect()
}

fn run(case: &Case, rho: f64, more: &str, steps: usize) -> Estimates {
    run_with(PATHS, case, rho, more, steps)
}

fn run_with(count: u64, case: &Case, rho: f64, more: &str, steps: usize) -> Estimates {
    let name = format!("{}-{steps}", case.id);
    estimate(
        &name,
        &model(case, rho, more),
        &[case.parameter("T")],
        Some(steps),
        count,
    )
}

/// The prices and the mean of the collected variance, by extrapolation from two steps (Talay & Tubaro 1990).
fn extrapolated(case: &Case, coarse: &Estimates, fine: &Estimates) -> Vec<Check> {
    let t = case.parameter("T");
    let collected = case.value("mean_integrated_variance/T") * t;
    let prices = strikes(case).into_iter();
    prices
        .map(|(name, _, price)| (name, price))
        .chain([("I".to_owned(), collected)])
        .map(|(name, analytic)| {
            let (a, b) = (
                coarse.check(0, &name, analytic),
                fine.check(0, &name, analytic),
            );
            // The bias is of second order in the step: of the trapezoidal rule.
            Check {
                sample: (4.0 * b.sample - a.sample) / 3.0,
                std_error: (4.0 * b.std_error + a.std_error) / 3.0,
                ..b
            }
        })
        .collect()
}

/// Steps of the two runs of each case.
const CASES: [(&str, usize); 3] = [
    ("C-heston-p25", 16),
    ("C-heston-p26", 20),
    ("C-heston-p27", 20),
];

const BY_MOMENTS: &str = "scheme = \"quadratic_exponential\"";
const TRUNCATED: &str = "scheme = \"full_truncation_euler\"";

/// The values of the literature at a number of paths.
pub(crate) fn published(count: u64) -> Vec<Check> {
    let reference = Reference::load("C");
    let mut checks = Vec::new();
    for (id, steps) in CASES {
        let case = reference.by_id(id);
        let rho = case.parameter("rho");
        let [coarse, fine] = [steps, 2 * steps].map(|n| run_with(count, case, rho, "", n));
        checks.extend(extrapolated(case, &coarse, &fine));
        // Kept by every single step, so that nothing is extrapolated.
        checks.push(coarse.check(0, "grown", case.parameter("S")));
    }
    assert_eq!(checks.len(), 13);
    checks
}

#[test]
fn prices_of_the_literature() {
    assert_family(&published(PATHS));
}

/// The first two moments of the variance and the mean of the price are kept by the quadratic-exponential scheme
/// too, at any step (Andersen 2008, sections 3.2 and 4.3).
#[test]
fn what_the_quadratic_exponential_scheme_keeps() {
    let reference = Reference::load("C");
    let mut checks = Vec::new();
    for (id, _) in CASES {
        let case = reference.by_id(id);
        let p = case.values();
        let (kappa, theta, eps) = (p.get("kappa"), p.get("theta"), p.get("eps"));
        // Cox, Ingersoll & Ross 1985, equation 19.
        let left = (-kappa * p.get("T")).exp();
        let mean = theta + (p.get("v0") - theta) * left;
        let variance =
            eps * eps * (1.0 - left) / kappa * (p.get("v0") * left + theta / 2.0 * (1.0 - left));
        let paths = run(case, p.get("rho"), BY_MOMENTS, 8);
        checks.push(paths.check(0, "V", mean));
        checks.push(paths.variance_check(0, "V", variance));
        checks.push(paths.check(0, "grown", p.get("S")));
    }
    assert_family(&checks);
}

/// At two steps a year in Andersen's first case the price at the money is off by less than 1 %, with the
/// quadratic-exponential scheme by less than 2 %, with full truncation by more than 20 %. A wrong sign of the
/// correlation is seen.
#[test]
fn bias_against_step_count() {
    let reference = Reference::load("C");
    let case = reference.by_id("C-heston-p27");
    let rho = case.parameter("rho");
    let (_, _, price) = strikes(case).remove(1);
    let off = |more: &str| {
        let (mean, error) = run(case, rho, more, 20).mean(0, "call_100");
        assert!(error < 0.002 * price, "{error}");
        (mean / price - 1.0).abs()
    };
    let (exact, by_moments, truncated) = (off(""), off(BY_MOMENTS), off(TRUNCATED));
    println!("{exact:.4} {by_moments:.4} {truncated:.4}");
    assert!(exact < 0.01 && by_moments < 0.02 && truncated > 0.2);
    let (coarse, fine) = (run(case, -rho, "", 20), run(case, -rho, "", 40));
    assert!(!failures(&extrapolated(case, &coarse, &fine)).is_empty());
}
