//! Formulas of a price in EUR/t with rates a year: which fit, which do not.

use crate::diagnostic::{Code, Diagnostics};
use crate::front;
use crate::source::SourceFile;

const DECLARATIONS: &str = r#"
[model]
name = "units"
time_unit = "year"
drivers = ["W", "B"]
[parameters]
S0 = { unit = "EUR/t", range = "(0, inf)" }
K = { unit = "EUR/t", range = "(0, inf)" }
mu = { unit = "1/year" }
sigma = { unit = "1/year^(1/2)", range = "(0, inf)" }
a = {}
b = {}
beta = {}
[where]
scaled = "S/K"
level = "log(S)"
[states.X]
initial = "a"
drift = "-mu*X"
"#;

/// The codes found in a model with these lines after the declarations.
fn codes(lines: &str) -> Vec<Code> {
    let source = SourceFile::new("units.toml", format!("{DECLARATIONS}{lines}"));
    let mut diagnostics = Diagnostics::new();
    front::read(&source, &mut diagnostics);
    let found = diagnostics.finish();
    let of_units = [
        Code::UnitMismatch,
        Code::UnitOfArgument,
        Code::UnreadableUnit,
    ];
    let codes = found.iter().map(|d| d.code);
    let other = found
        .iter()
        .find(|d| d.is_error() && !of_units.contains(&d.code));
    assert!(other.is_none(), "{lines}: {other:?}");
    codes.filter(|code| of_units.contains(code)).collect()
}

fn state(initial: &str, drift: &str, diffusion: &str) -> String {
    format!(
        "[states.S]\nunit = \"EUR/t\"\ndomain = \"(0, inf)\"\ninitial = \"{initial}\"\n\
         drift = \"{drift}\"\ndiffusion = {{ W = \"{diffusion}\" }}\n"
    )
}

/// A price that fits, and more lines.
fn price(lines: &str) -> String {
    format!("{}{lines}\n", state("S0", "mu*S", "sigma*S"))
}

#[test]
fn coefficients_that_fit() {
    let cases = [
        ("S0", "mu*S", "sigma*S"),
        ("40", "0.05*S", "0.2*S"),
        ("40", "a*S", "b*S"),
        ("S0", "mu*(K - S)", "sigma*sqrt(S*K)"),
        ("S0", "mu*S*(1 - S/12)", "sigma*S^beta"),
        ("S0", "mu*(a - level)*S", "sigma*S*scaled"),
        ("S0", "mu*S*(1 + sin(2*pi*t))", "sigma*S*exp(-mu*t)"),
        ("S0", "mu*S*sin(a*t + b)", "sigma*S*2^(-mu*t)"),
        ("S0", "0", "sigma*max(S - 40, 0)"),
        ("S0", "mu*S + sigma^2*S/2", "sigma*cbrt(S^2*K)"),
        ("S0", "sign(S - K)*mu*abs(S - K)", "sigma^3*S/mu"),
        ("S0", "sigma^2*S*(1 + 0.1*t)", "sigma*S"),
        ("K*exp(a)", "b*exp(a*level)", "sigma*S*normal_cdf(scaled)"),
    ];
    for (initial, drift, diffusion) in cases {
        let lines = state(initial, drift, diffusion);
        assert_eq!(codes(&lines), [], "{initial} | {drift} | {diffusion}");
    }
}

#[test]
fn coefficients_that_do_not() {
    use Code::{UnitMismatch, UnitOfArgument};
    let cases = [
        ("mu", "mu*S", "sigma*S", UnitMismatch),
        ("S0*K", "mu*S", "sigma*S", UnitMismatch),
        ("S0", "S", "sigma*S", UnitMismatch),
        ("S0", "mu", "sigma*S", UnitMismatch),
        ("S0", "2*S", "sigma*S", UnitMismatch),
        ("S0", "mu*S + sigma*S", "sigma*S", UnitMismatch),
        ("S0", "mu*S + mu", "sigma*S", UnitMismatch),
        ("S0", "mu*(1 - S/K)", "sigma*S", UnitMismatch),
        ("S0", "mu*S", "sigma^2*S", UnitMismatch),
        ("S0", "mu*S", "mu*S", UnitMismatch),
        ("S0", "mu*S", "sigma*sqrt(S)", UnitMismatch),
        ("S0", "mu*max(S, sigma)", "sigma*S", UnitMismatch),
        ("S0", "mu*S*t", "sigma*S", UnitMismatch),
        ("S0", "mu*S*exp(-S)", "sigma*S", UnitOfArgument),
        ("S0", "mu*S*sin(mu)", "sigma*S", UnitOfArgument),
        ("S0", "mu*S", "sigma*S*exp(-sigma*t)", UnitOfArgument),
        ("S0", "mu*S*scaled^S", "sigma*S", UnitOfArgument),
        ("S0", "mu*S", "sigma*S*normal_cdf(K)", UnitOfArgument),
    ];
    for (initial, drift, diffusion, code) in cases {
        let lines = state(initial, drift, diffusion);
        assert_eq!(codes(&lines), [code], "{initial} | {drift} | {diffusion}");
    }
}

#[test]
fn other_places_that_fit() {
    let cases = [
        "[assumptions]\nok = \"2*mu > sigma^2\"",
        "[assumptions]\nok = \"K > 10\"",
        "[correlation]\nW.B = \"a\"",
        "[derived.d]\nformula = \"S^2\"\nunit = \"EUR^2/t^2\"",
        "[derived.d]\nformula = \"exp(level)\"\nunit = \"EUR/t\"",
        "[derived.d]\nformula = \"log(S)\"\nunit = \"1\"",
        "[readouts.r]\nformula = \"exp(-mu*t)*max(S - K, 0)\"\nunit = \"EUR / t\"",
        "[claims]\nok = { drift_of = \"log(S)\", is = \"mu - sigma^2/2\" }",
        "[claims]\nok = { drift_of = \"S^2\", is = \"(2*mu + sigma^2)*S^2\" }",
        "[claims]\nok = { diffusion_of = \"S\", is = { W = \"sigma*S\" } }",
        "[claims]\nok = { mean_of = \"S\", is = \"S0*exp(mu*t)\" }",
        "[claims]\nok = { variance_of = \"S\", is = \"S0^2*(exp(sigma^2*t) - 1)\" }",
        "[claims]\nok = { covariance_of = [\"S\", \"level\"], is = \"S0*sigma^2*t\" }",
    ];
    for lines in cases {
        assert_eq!(codes(&price(lines)), [], "{lines}");
    }
}

#[test]
fn other_places_that_do_not() {
    use Code::{UnitMismatch, UnitOfArgument, UnreadableUnit};
    let cases = [
        ("[assumptions]\nbad = \"mu > sigma\"", UnitMismatch),
        ("[correlation]\nW.B = \"mu\"", UnitMismatch),
        (
            "[derived.d]\nformula = \"S^2\"\nunit = \"EUR/t\"",
            UnitMismatch,
        ),
        (
            "[derived.d]\nformula = \"log(S)\"\nunit = \"EUR/t\"",
            UnitMismatch,
        ),
        ("[readouts.r]\nformula = \"max(S - mu, 0)\"", UnitMismatch),
        ("[readouts.r]\nformula = \"exp(-mu)*S\"", UnitOfArgument),
        (
            "[claims]\nbad = { drift_of = \"log(S)\", is = \"mu - sigma/2\" }",
            UnitMismatch,
        ),
        (
            "[claims]\nbad = { drift_of = \"S^2\", is = \"2*mu*S\" }",
            UnitMismatch,
        ),
        (
            "[claims]\nbad = { diffusion_of = \"S\", is = { W = \"mu*S\" } }",
            UnitMismatch,
        ),
        (
            "[claims]\nbad = { mean_of = \"S\", is = \"mu*t\" }",
            UnitMismatch,
        ),
        (
            "[claims]\nbad = { variance_of = \"S\", is = \"S0*sigma^2*t\" }",
            UnitMismatch,
        ),
        (
            "[claims]\nbad = { covariance_of = [\"S\", \"level\"], is = \"sigma^2*t\" }",
            UnitMismatch,
        ),
        (
            "[derived.d]\nformula = \"S\"\nunit = \"EUR/(t\"",
            UnreadableUnit,
        ),
    ];
    for (lines, code) in cases {
        assert_eq!(codes(&price(lines)), [code], "{lines}");
    }
}

#[test]
fn units_are_optional() {
    let bare = "[model]\nname = \"m\"\ntime_unit = \"year\"\n[parameters]\na = 1\n[states.X]\n\
                initial = \"1\"\ndrift = \"-X*exp(-X) + t + a\"\n";
    let source = SourceFile::new("m.toml", bare);
    let mut diagnostics = Diagnostics::new();
    assert!(front::read(&source, &mut diagnostics).is_some());
    assert!(diagnostics.finish().is_empty());
}

#[test]
fn unknowns_are_found_and_their_conflicts_told() {
    // `a` starts X, whose unit is not known, and S: both are EUR/t then; `b` cannot be two things.
    let fits = format!(
        "{}[derived.sum]\nformula = \"X + S\"\n",
        state("a", "mu*S", "sigma*S")
    );
    assert_eq!(codes(&fits), []);
    let conflict = price("[readouts.r]\nformula = \"(S + b)*exp(-b*t)\"");
    assert_eq!(codes(&conflict), [Code::UnitOfArgument]);
}
