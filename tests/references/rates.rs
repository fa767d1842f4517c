//! Bonds, futures and options on them that need only Gaussian laws (reference C), and the square-root bond by
//! its scheme's own affine recursion.

use driftwright_tests::harness::checks::{Check, assert_family};
use driftwright_tests::harness::laws::{black_call, decayed, integrated_covariance, ou_variance};
use driftwright_tests::harness::reference::{Case, Reference};

use crate::estimate::estimate;
use crate::model::{ModelText, POSITIVE};

const PATHS: u64 = 1_500_000;

/// Every value here that a Gaussian law gives, at a number of paths.
pub(crate) fn gaussian(paths: u64) -> Vec<Check> {
    let all = [
        bonds,
        coupon_option,
        swaption_price,
        convenience_yield,
        two_factors,
    ];
    all.into_iter().flat_map(|checks| checks(paths)).collect()
}

/// A case's list of times.
fn times(case: &Case) -> Vec<f64> {
    let list = case.params["T"].as_array().expect("a list of times");
    list.iter()
        .map(driftwright_tests::harness::values::number)
        .collect()
}

/// Tests of a quantity at each of the case's times.
fn at_times(
    case: &Case,
    paths: &crate::estimate::Estimates,
    own: &str,
    theirs: &str,
    checks: &mut Vec<Check>,
) {
    let values: Vec<(f64, f64)> = case.values_at(theirs).collect();
    assert_eq!(values.len(), times(case).len(), "{} {theirs}", case.id);
    for (index, (time, value)) in values.into_iter().enumerate() {
        assert_eq!(time, times(case)[index]);
        checks.push(paths.check(index, own, value));
    }
}

/// A Gaussian short rate with its integral.
fn short_rate(case: &Case) -> ModelText {
    ModelText::new(&["W"])
        .parameters_of(case)
        .state("R", "r0", "kappa*(theta - R)", &[("W", "sigma")], "")
        .state("I", "0", "R", &[], "")
        .derived("discount", "exp(-I)")
}

/// Zero bonds of Vasicek 1977; the integral of the rate is normal.
fn bonds(count: u64) -> Vec<Check> {
    let reference = Reference::load("C");
    let case = reference.by_id("C-vasicek-p30");
    let p = case.values();
    for (t, value) in case.values_at("zcb") {
        let (kappa, theta, sigma) = (p.get("kappa"), p.get("theta"), p.get("sigma"));
        let mean = theta * t + (p.get("r0") - theta) * decayed(kappa, t);
        let variance = sigma * sigma * integrated_covariance(kappa, kappa, t);
        let bond = (variance / 2.0 - mean).exp();
        assert!((bond / value - 1.0).abs() < 1e-10, "{t}: {bond} {value}");
    }
    let paths = estimate(&case.id, &short_rate(case), &times(case), None, count);
    let mut checks = Vec::new();
    at_times(case, &paths, "discount", "zcb", &mut checks);
    checks
}

#[test]
fn gaussian_bonds() {
    assert_family(&bonds(PATHS));
}

/// An option on a coupon bond (Jamshidian 1989): the coupons' value at expiry is a function of the rate.
fn coupon_option(count: u64) -> Vec<Check> {
    let reference = Reference::load("C");
    let case = reference.by_id("C-coupon-option-p32");
    let p = case.values();
    let (kappa, theta, sigma) = (p.get("kappa"), p.get("theta"), p.get("sigma"));
    let list = |name: &str| {
        let entries = case.params[name].as_array().expect("a list");
        let numbers = entries
            .iter()
            .map(driftwright_tests::harness::values::number);
        numbers.collect::<Vec<f64>>()
    };
    // Each flow is worth flow*exp(a - b R) at expiry, from the bond formula of Vasicek 1977.
    let worth: Vec<String> = list("times")
        .iter()
        .zip(list("flows"))
        .map(|(time, flow)| {
            let left = time - p.get("T");
            let b = decayed(kappa, left);
            let variance = sigma * sigma * integrated_covariance(kappa, kappa, left);
            let a = variance / 2.0 - theta * (left - b);
            format!("{flow:?}*exp({a:?} - {b:?}*R)")
        })
        .collect();
    let payoff = format!("exp(-I)*max(K - ({}), 0)", worth.join(" + "));
    let model = short_rate(case).readout("put", &payoff);
    let paths = estimate(&case.id, &model, &[p.get("T")], None, count);
    vec![paths.check(0, "put", case.value("option"))]
}

#[test]
fn option_on_a_coupon_bond() {
    assert_family(&coupon_option(PATHS));
}

/// A payer swaption as Black's call on the forward swap rate (Black 1976; Hull 2018, section 29.3).
fn swaption_price(count: u64) -> Vec<Check> {
    let reference = Reference::load("C");
    let case = reference.by_id("C-swaption-flat-p06");
    let p = case.values();
    let (forward, annuity) = (case.value("forward_swap_rate"), case.value("annuity"));
    let variance = p.get("sigma").powi(2) * p.get("n");
    let price = p.get("L") * annuity * black_call(forward, p.get("K"), variance);
    assert!((price / case.value("payer_swaption") - 1.0).abs() < 1e-10);
    let model = ModelText::new(&["W"])
        .parameters_of(case)
        .parameter("forward", forward)
        .parameter("annuity", annuity)
        .state("Z", "forward", "0", &[("W", "sigma*Z")], POSITIVE)
        .readout("payer", "L*annuity*max(Z - K, 0)");
    let paths = estimate(&case.id, &model, &[p.get("n")], None, count);
    vec![paths.check(0, "payer", case.value("payer_swaption"))]
}

#[test]
fn swaption() {
    assert_family(&swaption_price(PATHS));
}

/// Futures prices under a mean-reverting convenience yield (Schwartz 1997, two-factor model).
fn convenience_yield(count: u64) -> Vec<Check> {
    let reference = Reference::load("C");
    let case = reference.by_id("C-schwartz2-p33");
    let model = ModelText::new(&["V", "W"])
        .parameters_of(case)
        .correlated("V", "W", case.parameter("rho"))
        .state("Z", "S", "(r - delta)*Z", &[("V", "sigma1*Z")], POSITIVE)
        .state(
            "delta",
            "delta0",
            "kappa*(alpha - delta) - lambda",
            &[("W", "sigma2")],
            "",
        )
        .derived("log_Z", "log(Z)");
    // At ten years the variance of log Z is 0.67: the log-normal means need more paths than the rest.
    let paths = estimate(&case.id, &model, &times(case), None, count);
    let mut checks = Vec::new();
    at_times(case, &paths, "Z", "futures", &mut checks);
    for (index, (time, value)) in case.values_at("var(log S)").enumerate() {
        assert_eq!(time, times(case)[index]);
        checks.push(paths.variance_check(index, "log_Z", value));
    }
    checks
}

#[test]
fn futures_with_convenience_yield() {
    assert_family(&convenience_yield(PATHS));
}

/// Expected spots and futures of two log factors (Schwartz & Smith 2000, equations 6 and 9).
fn two_factors(count: u64) -> Vec<Check> {
    let reference = Reference::load("C");
    let case = reference.by_id("C-schwartz-smith-p34");
    let factors = |passing: &str, lasting: &str| {
        ModelText::new(&["V", "W"])
            .parameters_of(case)
            .correlated("V", "W", case.parameter("rho"))
            .state("chi", "chi0", passing, &[("V", "sigma_chi")], "")
            .state("xi", "xi0", lasting, &[("W", "sigma_xi")], "")
            .derived("log_spot", "chi + xi")
            .derived("spot", "exp(chi + xi)")
    };
    let mut checks = Vec::new();
    let priced = factors("-kappa*chi - lambda_chi", "mu_xi_star");
    let paths = estimate(&case.id, &priced, &times(case), None, count);
    at_times(case, &paths, "spot", "futures", &mut checks);
    let real = factors("-kappa*chi", "mu_xi");
    let paths = estimate(&case.id, &real, &times(case), None, count);
    at_times(case, &paths, "spot", "E[S] real-world", &mut checks);
    for (index, (time, value)) in case.values_at("var(log S)").enumerate() {
        let (kappa, p) = (case.parameter("kappa"), case.values());
        let shared = p.get("rho") * p.get("sigma_chi") * p.get("sigma_xi");
        let formula = ou_variance(kappa, p.get("sigma_chi"), time)
            + p.get("sigma_xi").powi(2) * time
            + 2.0 * shared * decayed(kappa, time);
        assert!((formula / value - 1.0).abs() < 1e-10);
        checks.push(paths.variance_check(index, "log_spot", value));
    }
    checks
}

#[test]
fn two_factor_futures() {
    assert_family(&two_factors(PATHS));
}

/// Bonds under a square-root rate (Cox, Ingersoll & Ross 1985, equation 23). The scheme has a bias of order h;
/// two step sizes on independent paths extrapolate it away (Talay & Tubaro 1990).
pub(crate) fn square_root(count: u64) -> Vec<Check> {
    let reference = Reference::load("C");
    let case = reference.by_id("C-cir-bond-p31");
    let model = ModelText::new(&["W"])
        .parameters_of(case)
        .state(
            "R",
            "r0",
            "kappa*(theta - R)",
            &[("W", "sigma*sqrt(R)")],
            "domain = \"[0, inf)\"\nat_edge = \"as_equation\"",
        )
        .state("I", "0", "R", &[], "")
        .derived("discount", "exp(-I)");
    let horizon = &times(case)[..3];
    let coarse = estimate(&case.id, &model, horizon, Some(400), count);
    let fine = estimate(
        &format!("{}-fine", case.id),
        &model,
        horizon,
        Some(800),
        count,
    );
    case.values_at("zcb")
        .take(horizon.len())
        .enumerate()
        .map(|(index, (time, value))| {
            assert_eq!(time, horizon[index]);
            let ((a, sa), (b, sb)) = (coarse.mean(index, "discount"), fine.mean(index, "discount"));
            Check {
                what: format!("{} discount at {time}", case.id),
                sample: 2.0 * b - a,
                analytic: value,
                std_error: (4.0 * sb * sb + sa * sa).sqrt(),
            }
        })
        .collect()
}

#[test]
fn square_root_bonds() {
    assert_family(&square_root(300_000));
}
