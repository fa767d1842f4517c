//! Claims: proofs of textbook results, refutations with a witness, and what must stay open.

use std::collections::BTreeMap;

use driftwright::analysis::claims::{ClaimResult, Verdict};
use driftwright::diagnostic::{Code, human};
use driftwright::pipeline::{Compiled, compile};
use driftwright::source::SourceFile;
use driftwright::symbolic::Symbol;

use crate::common::{close, compiled};

/// A model for claims about most things.
const MODEL: &str = r#"
[model]
name = "orchards"
drivers = ["W", "B"]

[parameters]
S0 = { value = 42, range = "(0, inf)" }
mu = 0.05
sigma = { value = 0.2, range = "(0, inf)" }
kappa = { value = 1.1, range = "(0, inf)" }
theta = 0.4
eta = { value = 0.3, range = "(0, inf)" }
rho = { value = 0.5, range = "(-1, 1)" }

[correlation]
W.B = "rho"

[states.S]
initial = "S0"
drift = "mu*S"
diffusion = { W = "sigma*S" }
domain = "(0, inf)"

[states.X]
initial = "0"
drift = "kappa*(theta - X)"
diffusion = { B = "eta" }
"#;

/// Claims about readouts, with their wrong twins: prices of options on the orchard's spot.
const OPTIONS: [(&str, &str, &str, &str); 5] = [
    (
        // Black and Scholes 1973, equation 13.
        "call",
        "exp(-mu*t)*max(S - strike, 0)",
        "S0*normal_cdf((log(S0/strike) + (mu + sigma^2/2)*t)/(sigma*sqrt(t))) \
         - strike*exp(-mu*t)*normal_cdf((log(S0/strike) + (mu - sigma^2/2)*t)/(sigma*sqrt(t)))",
        "S0*normal_cdf((log(S0/strike) + (mu - sigma^2/2)*t)/(sigma*sqrt(t))) \
         - strike*exp(-mu*t)*normal_cdf((log(S0/strike) + (mu - sigma^2/2)*t)/(sigma*sqrt(t)))",
    ),
    (
        "put, by parity",
        "exp(-mu*t)*max(strike - S, 0)",
        "strike*exp(-mu*t)*(1 - normal_cdf((log(S0/strike) + (mu - sigma^2/2)*t)/(sigma*sqrt(t)))) \
         - S0*(1 - normal_cdf((log(S0/strike) + (mu + sigma^2/2)*t)/(sigma*sqrt(t))))",
        "S0 - strike*exp(-mu*t)",
    ),
    (
        // Bachelier 1900, for a Brownian motion.
        "option on a normal variable",
        "max(log(S) - log(S0) - (mu - sigma^2/2)*t, 0)",
        "sigma*sqrt(t)*normal_pdf(0)",
        "sigma*sqrt(t)/2",
    ),
    (
        "digital",
        "(1 + sign(S - strike))/2",
        "normal_cdf((log(S0/strike) + (mu - sigma^2/2)*t)/(sigma*sqrt(t)))",
        "normal_cdf((log(S0/strike) + (mu + sigma^2/2)*t)/(sigma*sqrt(t)))",
    ),
    (
        // The mean of a folded normal variable (Leone, Nelson and Nottingham 1961).
        "absolute log return",
        "abs(log(S/S0) - (mu - sigma^2/2)*t)",
        "sigma*sqrt(2*t/pi)",
        "sigma*sqrt(t)",
    ),
];

#[test]
fn prices_of_options_are_proved_and_wrong_ones_refuted() {
    let model = MODEL.replace(
        "[correlation]",
        "strike = { value = 40, range = \"(0, inf)\" }\n[correlation]",
    );
    for (what, payoff, right, wrong) in OPTIONS {
        for (price, due) in [(right, Verdict::Proved), (wrong, Verdict::Refuted)] {
            let readout = format!("[readouts.payoff]\nformula = \"{payoff}\"\n");
            let claims = format!("[claims]\nc = {{ mean_of = \"payoff\", is = \"{price}\" }}\n");
            let compiled = compiled(&format!("{model}\n{readout}\n{claims}"));
            let claim = &compiled.claims[0];
            let derived = claim.derived.map(|e| compiled.model.pool.format(e));
            assert_eq!(claim.verdict, due, "{what}: {} {derived:?}", claim.reason);
        }
    }
}

/// The right to exchange one orchard's crop for another's (Margrabe 1978).
#[test]
fn the_price_of_an_exchange_is_proved() {
    let state = |name: &str, driver: &str, vol: &str| {
        format!(
            "[states.{name}]\ninitial = \"{name}0\"\ndrift = \"0\"\n\
             diffusion = {{ {driver} = \"{vol}*{name}\" }}\ndomain = \"(0, inf)\"\n"
        )
    };
    let d = |sign: &str| {
        format!("normal_cdf((log(A0/B0) {sign} nu^2*t/2)/(nu*sqrt(t)))")
            .replace("nu^2", "(a^2 + b^2 - 2*rho*a*b)")
            .replace("nu", "sqrt(a^2 + b^2 - 2*rho*a*b)")
    };
    let text = format!(
        "[model]\nname = \"case\"\ndrivers = [\"W\", \"V\"]\n[parameters]\n\
         A0 = {{ value = 1, range = \"(0, inf)\" }}\nB0 = {{ value = 1, range = \"(0, inf)\" }}\n\
         a = {{ value = 0.2, range = \"(0, inf)\" }}\nb = {{ value = 0.3, range = \"(0, inf)\" }}\n\
         rho = {{ value = 0.4, range = \"(-1, 1)\" }}\n[correlation]\nW.V = \"rho\"\n{}{}\
         [claims]\nc = {{ mean_of = \"max(A - B, 0)\", is = \"A0*{} - B0*{}\" }}\n",
        state("A", "W", "a"),
        state("B", "V", "b"),
        d("+"),
        d("-")
    );
    let claim = &compiled(&text).claims[0];
    assert_eq!(claim.verdict, Verdict::Proved, "{}", claim.reason);
}

fn judged(claims: &str) -> (Compiled, ClaimResult) {
    let compiled = compiled(&format!("{MODEL}\n[claims]\n{claims}\n"));
    let claim = compiled.claims[0].clone();
    (compiled, claim)
}

/// Right claims, each with the wrong twin that loses or turns one term.
const PAIRS: [(&str, &str, &str); 14] = [
    (
        "lost Ito correction",
        r#"c = { drift_of = "log(S)", is = "mu - sigma^2/2" }"#,
        r#"c = { drift_of = "log(S)", is = "mu" }"#,
    ),
    (
        "wrong sign of the correction",
        r#"c = { drift_of = "S^2", is = "(2*mu + sigma^2)*S^2" }"#,
        r#"c = { drift_of = "S^2", is = "(2*mu - sigma^2)*S^2" }"#,
    ),
    (
        "wrong sign of the correlation",
        r#"c = { drift_of = "S*X", is = "mu*S*X + kappa*(theta - X)*S + rho*sigma*eta*S" }"#,
        r#"c = { drift_of = "S*X", is = "mu*S*X + kappa*(theta - X)*S - rho*sigma*eta*S" }"#,
    ),
    (
        "time derivative",
        r#"c = { drift_of = "t*X", is = "X + t*kappa*(theta - X)" }"#,
        r#"c = { drift_of = "t*X", is = "t*kappa*(theta - X)" }"#,
    ),
    (
        "diffusion",
        r#"c = { diffusion_of = "X*log(S)", is = { W = "sigma*X", B = "eta*log(S)" } }"#,
        r#"c = { diffusion_of = "X*log(S)", is = { W = "sigma*X" } }"#,
    ),
    (
        "discounting",
        r#"c = { martingale = "exp(-mu*t)*S" }"#,
        r#"c = { martingale = "exp(mu*t)*S" }"#,
    ),
    (
        "quadratic martingale",
        r#"c = { martingale = "(log(S) - (mu - sigma^2/2)*t)^2 - sigma^2*t" }"#,
        r#"c = { martingale = "(log(S) - mu*t)^2 - sigma^2*t" }"#,
    ),
    (
        "mean",
        r#"c = { mean_of = "S", is = "S0*exp(mu*t)" }"#,
        r#"c = { mean_of = "S", is = "S0*exp((mu - sigma^2/2)*t)" }"#,
    ),
    (
        "variance",
        r#"c = { variance_of = "X", is = "eta^2/(2*kappa)*(1 - exp(-2*kappa*t))" }"#,
        r#"c = { variance_of = "X", is = "eta^2/kappa*(1 - exp(-kappa*t))" }"#,
    ),
    (
        "covariance",
        r#"c = { covariance_of = ["log(S)", "X"], is = "rho*sigma*eta/kappa*(1 - exp(-kappa*t))" }"#,
        r#"c = { covariance_of = ["log(S)", "X"], is = "-rho*sigma*eta/kappa*(1 - exp(-kappa*t))" }"#,
    ),
    // The mean of a product of a lognormal and a normal variable, by exponential tilting.
    (
        "mean of a product",
        r#"c = { mean_of = "S*X", is = "S0*exp(mu*t)*(theta*(1 - exp(-kappa*t)) + rho*sigma*eta/kappa*(1 - exp(-kappa*t)))" }"#,
        r#"c = { mean_of = "S*X", is = "S0*exp(mu*t)*theta*(1 - exp(-kappa*t))" }"#,
    ),
    (
        "lognormal law",
        r#"c = { law_of = "S^2", is = "lognormal" }"#,
        r#"c = { law_of = "S", is = "normal" }"#,
    ),
    (
        "normal law",
        r#"c = { law_of = "2*log(S) - X", is = "normal" }"#,
        r#"c = { law_of = "X", is = "lognormal" }"#,
    ),
    (
        "transformed law",
        r#"c = { law_of = "S", is = "transformed_normal" }"#,
        r#"c = { law_of = "X", is = "deterministic" }"#,
    ),
];

#[test]
fn right_claims_are_proved_and_wrong_ones_refuted() {
    for (what, right, wrong) in PAIRS {
        let (_, claim) = judged(right);
        assert_eq!(claim.verdict, Verdict::Proved, "{what}: {}", claim.reason);
        assert!(
            claim.difference.is_none() && claim.witness.is_none(),
            "{what}"
        );
        let (compiled, claim) = judged(wrong);
        assert_eq!(claim.verdict, Verdict::Refuted, "{what}: {}", claim.reason);
        if claim.kind != "law_of" {
            check_witness(&compiled, &claim, what);
        }
    }
}

/// The witness lies inside the ranges, and the two sides really have the values it gives.
fn check_witness(compiled: &Compiled, claim: &ClaimResult, what: &str) {
    let pool = &compiled.model.pool;
    let witness = claim
        .witness
        .as_ref()
        .unwrap_or_else(|| panic!("{what}: no witness"));
    let point: BTreeMap<Symbol, f64> = witness.point.iter().copied().collect();
    let value = |e| {
        pool.eval_f64(e, &point)
            .unwrap_or_else(|| panic!("{what}: no value"))
    };
    let (derived, claimed) = (value(claim.derived.unwrap()), value(claim.claimed.unwrap()));
    assert!(
        close(derived, witness.left, 1e-9, 1e-12),
        "{what}: {derived}, {witness:?}"
    );
    assert!(
        close(claimed, witness.right, 1e-9, 1e-12),
        "{what}: {claimed}, {witness:?}"
    );
    let difference = value(claim.difference.expect("a difference"));
    assert!(
        close(difference, derived - claimed, 1e-6, 1e-9),
        "{what}: {difference}"
    );
    assert!(
        !close(derived, claimed, 1e-9, 0.0),
        "{what}: the sides agree at the witness"
    );
    for name in ["S", "S0", "sigma", "kappa", "eta"] {
        let value = point.get(&pool.find_symbol(name).expect("declared"));
        assert!(
            value.is_none_or(|&v| v > 0.0),
            "{what}: {name} outside its range"
        );
    }
}

/// Only refuted claims are errors, with both sides, the difference and a point in the diagnostic.
#[test]
fn a_refuted_claim_is_an_error_with_its_evidence() {
    let text = format!("{MODEL}\n[claims]\nlog_drift = {{ drift_of = \"log(S)\", is = \"mu\" }}\n");
    let source = SourceFile::new("orchards.toml", text.as_str());
    let compilation = compile(&source);
    assert!(compilation.has_errors() && compilation.compiled.is_some());
    let error = compilation
        .diagnostics
        .iter()
        .find(|d| d.is_error())
        .expect("an error");
    assert_eq!(error.code, Code::ClaimRefuted);
    assert_eq!(source.slice(error.span), "mu");
    let shown = human(&source, &compilation.diagnostics, false);
    for part in [
        "claim `log_drift` is wrong",
        "the Ito drift of `log(S)` is not what is claimed",
        "it lacks the Ito correction -sigma^2/2",
        "derived: mu - sigma^2/2",
        "claimed: mu",
        "difference: -sigma^2/2",
        "at mu = ",
    ] {
        assert!(shown.contains(part), "{part:?} is missing in\n{shown}");
    }
}

fn one_state(diffusion: &str, drift: &str, domain: &str, claims: &str) -> ClaimResult {
    let text = format!(
        "[model]\nname = \"case\"\ndrivers = [\"W\"]\n\
         [parameters]\na = {{ value = 1, range = \"(0, inf)\" }}\nb = 0.5\n\
         [assumptions]\nlarge = \"b > 2*a\"\n\
         [states.X]\ninitial = \"1\"\ndrift = \"{drift}\"\ndiffusion = \"{diffusion}\"\n{domain}\n\
         [claims]\n{claims}\n"
    );
    compiled(&text).claims[0].clone()
}

/// A driftless power diffusion is a true martingale up to linear growth and a strict local one beyond
/// (Delbaen and Shirakawa 2002): never certified, and refuted where the theorem applies.
#[test]
fn strict_local_martingales_are_never_certified() {
    let half_line = "domain = \"(0, inf)\"";
    let claim = "c = { martingale = \"X\" }";
    for (diffusion, due) in [
        ("a*X", Verdict::Proved),
        ("a*X^2", Verdict::Refuted),
        ("a*X^(3/2)", Verdict::Refuted),
        ("a*X*(1 + X)", Verdict::Refuted),
    ] {
        let result = one_state(diffusion, "0", half_line, claim);
        assert_eq!(result.verdict, due, "{diffusion}: {}", result.reason);
        assert_eq!(result.local, Some(Verdict::Proved), "{diffusion}");
    }
    let absorbed = "domain = \"[0, inf)\"\nat_edge = \"absorb\"";
    let result = one_state("a*sqrt(X)", "0", absorbed, claim);
    assert_eq!(result.verdict, Verdict::Proved, "{}", result.reason);
    // The inverse of a three-dimensional Bessel process, seen from the process itself.
    let result = one_state("1", "1/X", half_line, "c = { martingale = \"1/X\" }");
    assert_eq!(result.verdict, Verdict::Open, "{}", result.reason);
    assert_eq!(result.local, Some(Verdict::Proved));
}

/// Where an end is attained and the equation does not rule there, nothing is proved beyond it.
#[test]
fn claims_stay_open_beyond_an_attained_end() {
    let drift = "c = { drift_of = \"X^2\", is = \"1\" }";
    let reflected = "domain = \"[0, inf)\"\nat_edge = \"reflect\"";
    assert_eq!(one_state("1", "0", reflected, drift).verdict, Verdict::Open);
    // A refutation is local, and holds.
    let wrong = "c = { drift_of = \"X^2\", is = \"2\" }";
    assert_eq!(
        one_state("1", "0", reflected, wrong).verdict,
        Verdict::Refuted
    );
    let mean = "c = { mean_of = \"X\", is = \"1\" }";
    assert_eq!(one_state("1", "0", reflected, mean).verdict, Verdict::Open);
    let martingale = "c = { martingale = \"X\" }";
    assert_eq!(
        one_state("1", "0", reflected, martingale).verdict,
        Verdict::Open
    );
    // A square-root process that reaches 0 stays in its domain, so polynomials are safe there and
    // logarithms are not.
    let rooted = "domain = \"[0, inf)\"\nat_edge = \"as_equation\"";
    let square = "c = { drift_of = \"X^2\", is = \"3*a*X/2 - 2*a*X^2\" }";
    assert_eq!(
        one_state("sqrt(a*X)", "a*(1/4 - X)", rooted, square).verdict,
        Verdict::Proved
    );
    let log = "c = { drift_of = \"log(X)\", is = \"-a/(4*X) - a\" }";
    let result = one_state("sqrt(a*X)", "a*(1/4 - X)", rooted, log);
    assert_eq!(result.verdict, Verdict::Open, "{}", result.reason);
}

/// Equality is for all parameters that the assumptions admit: a witness may not break one.
#[test]
fn witnesses_keep_the_assumptions() {
    let result = one_state("1", "b", "", "c = { drift_of = \"X\", is = \"a\" }");
    assert_eq!(result.verdict, Verdict::Refuted);
    let witness = result.witness.expect("a witness");
    assert!(witness.left > 2.0 * witness.right, "{witness:?}");
}

/// Default values never enter a proof: here the claim holds at them alone.
#[test]
fn default_values_prove_nothing() {
    let (_, claim) = judged("c = { mean_of = \"X\", is = \"2/5*(1 - exp(-kappa*t))\" }");
    assert_eq!(claim.verdict, Verdict::Refuted);
}

/// The square-root process has a noncentral chi-square law up to a factor (Cox, Ingersoll and Ross
/// 1985, equation 18).
#[test]
fn the_square_root_law_is_known() {
    let rooted = "domain = \"[0, inf)\"\nat_edge = \"as_equation\"";
    let law = |name: &str| format!("c = {{ law_of = \"X\", is = \"{name}\" }}");
    let result = one_state(
        "sqrt(a*X)",
        "a*(1 - X)",
        rooted,
        &law("noncentral_chi_square"),
    );
    assert_eq!(result.verdict, Verdict::Proved, "{}", result.reason);
    let result = one_state("sqrt(a*X)", "a*(1 - X)", rooted, &law("lognormal"));
    assert_eq!(result.verdict, Verdict::Refuted, "{}", result.reason);
}
