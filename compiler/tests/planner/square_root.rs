//! Square-root processes in many coordinates: found, with the right behaviour at zero, or refused with a
//! reason.

use crate::support::{Planned, plan};
use driftwright::analysis::square_root::AtZero;
use driftwright::diagnostic::Code;
use driftwright::scheme::{Group, Law, Method};

const PARAMETERS: &str = "[model]\nname = \"m\"\ndrivers = [\"W\", \"B\"]\n[parameters]\n\
    k = { value = 0.7, range = \"(0, inf)\" }\nm = { value = 0.4, range = \"(0, inf)\" }\n\
    s = { value = 0.3, range = \"(0, inf)\" }\nq = { value = 0.2, range = \"(-inf, inf)\" }\n\
    g = { value = 0.7, range = \"(0, 1)\" }\nhigh = { value = 0.7, range = \"(1/2, 1)\" }\n\
    [assumptions]\nfeller = \"2*k*m >= s^2\"\n";

/// The plan of a state with this equation; `more` holds further lines.
fn planned(drift: &str, noise: &str, domain: &str, more: &str) -> Planned {
    plan(&format!(
        "{PARAMETERS}[states.x]\ninitial = \"0.6\"\ndrift = \"{drift}\"\ndiffusion = {{ W = \"{noise}\" }}\n\
         domain = \"{domain}\"\n{more}\n"
    ))
}

fn only(planned: &Planned) -> &Group {
    let [group] = &planned.plan.groups[..] else {
        panic!("{:#?}", planned.plan.groups)
    };
    group
}

const AS_EQUATION: &str = "at_edge = \"as_equation\"";
const ABSORB: &str = "at_edge = \"absorb\"";
const REFLECT: &str = "at_edge = \"reflect\"";
const PLAIN: Law = Law::NoncentralChiSquare;
const IMAGE: Law = Law::TransformedNoncentralChiSquare;
const STOPPED: Law = Law::AbsorbedNoncentralChiSquare;

/// Equation, domain and rule; coordinate, law and behaviour at zero.
type Found = (
    &'static str,
    &'static str,
    &'static str,
    &'static str,
    &'static str,
    Law,
    AtZero,
);

/// Each by Ito's rule from `dy = (level - rate y) dt + s sqrt(y) dW`.
const FOUND: [Found; 27] = [
    (
        "k*(m - x)",
        "s*sqrt(x)",
        "[0, inf)",
        AS_EQUATION,
        "x",
        PLAIN,
        AtZero::NotReached,
    ),
    (
        "k*(m - x)",
        "s*sqrt(x)",
        "(0, inf)",
        "",
        "x",
        PLAIN,
        AtZero::NotReached,
    ),
    (
        "k*m - k*x + (x^2 - 1)/(x + 1) - x + 1",
        "s*x/sqrt(x)",
        "[0, inf)",
        AS_EQUATION,
        "x",
        PLAIN,
        AtZero::NotReached,
    ),
    (
        "m - k*x",
        "s*sqrt(x)",
        "[0, inf)",
        AS_EQUATION,
        "x",
        PLAIN,
        AtZero::Reflected,
    ),
    (
        "m - k*x",
        "s*sqrt(x)",
        "[0, inf)",
        REFLECT,
        "x",
        PLAIN,
        AtZero::Reflected,
    ),
    (
        "m - k*x",
        "s*sqrt(x)",
        "[0, inf)",
        ABSORB,
        "x",
        STOPPED,
        AtZero::Absorbed,
    ),
    (
        "q*x",
        "s*sqrt(x)",
        "[0, inf)",
        AS_EQUATION,
        "x",
        PLAIN,
        AtZero::Absorbed,
    ),
    (
        "m - k*(x - 1/2)",
        "s*sqrt(x - 1/2)",
        "[1/2, inf)",
        AS_EQUATION,
        "x - 1/2",
        PLAIN,
        AtZero::Reflected,
    ),
    (
        "k*(1 - x) - m",
        "s*sqrt(1 - x)",
        "(-inf, 1]",
        AS_EQUATION,
        "1 - x",
        PLAIN,
        AtZero::Reflected,
    ),
    // Three halves (Heston 1997), and the reciprocal with linear drift alone.
    (
        "k*x*(m - x)",
        "s*x^(3/2)",
        "(0, inf)",
        "",
        "1/x",
        IMAGE,
        AtZero::NotReached,
    ),
    (
        "q*x",
        "s*x^(3/2)",
        "(0, inf)",
        "",
        "1/x",
        IMAGE,
        AtZero::NotReached,
    ),
    // Constant elasticity (Cox 1975), with a number and with a parameter as exponent.
    (
        "q*x",
        "s*x^0.7",
        "[0, inf)",
        AS_EQUATION,
        "x^0.6",
        STOPPED,
        AtZero::Absorbed,
    ),
    (
        "q*x",
        "s*x^high",
        "[0, inf)",
        AS_EQUATION,
        "x^(2 - 2*high)",
        STOPPED,
        AtZero::Absorbed,
    ),
    (
        "q*x",
        "s*x^g",
        "[0, inf)",
        ABSORB,
        "x^(2 - 2*g)",
        STOPPED,
        AtZero::Absorbed,
    ),
    (
        "q*x + m*x^(-2/5)",
        "s*x^0.3",
        "[0, inf)",
        ABSORB,
        "x^1.4",
        STOPPED,
        AtZero::Absorbed,
    ),
    // Bessel processes, radial Ornstein-Uhlenbeck processes, a Brownian motion folded or stopped.
    (
        "m/x",
        "s",
        "[0, inf)",
        AS_EQUATION,
        "x^2",
        IMAGE,
        AtZero::Reflected,
    ),
    (
        "s^2/x - k*x",
        "s",
        "(0, inf)",
        "",
        "x^2",
        IMAGE,
        AtZero::NotReached,
    ),
    (
        "-k*x",
        "s",
        "[0, inf)",
        REFLECT,
        "x^2",
        IMAGE,
        AtZero::Reflected,
    ),
    (
        "0",
        "s",
        "[0, inf)",
        ABSORB,
        "x^2",
        STOPPED,
        AtZero::Absorbed,
    ),
    // A logarithm, and coordinates that only the derivatives of the coefficients give.
    (
        "k*m*exp(-x) - k - s^2/2*exp(-x)",
        "s*exp(-x/2)",
        "(-inf, inf)",
        "",
        "exp(x)",
        IMAGE,
        AtZero::NotReached,
    ),
    (
        "x*(-s^2/2*log(x) - k*(m + log(x)))",
        "s*x*sqrt(-log(x))",
        "(0, 1)",
        "",
        "-4*log(x)/s^2",
        IMAGE,
        AtZero::NotReached,
    ),
    (
        "x^3*s^2*(1/x - 1) - x^2*(m - k*(1/x - 1))",
        "s*x^2*sqrt(1/x - 1)",
        "(0, 1]",
        AS_EQUATION,
        "4*(1 - x)/(s^2*x)",
        IMAGE,
        AtZero::Reflected,
    ),
    // Coefficients that depend on time, the dimension does not.
    (
        "k*s^2*exp(t) - m*x*(1 + t)",
        "s*exp(t/2)*sqrt(x)",
        "[0, inf)",
        AS_EQUATION,
        "x",
        PLAIN,
        AtZero::Reflected,
    ),
    (
        "q*x*sin(t)",
        "s*(2 + cos(t))*x^0.7",
        "[0, inf)",
        AS_EQUATION,
        "x^0.6",
        STOPPED,
        AtZero::Absorbed,
    ),
    (
        "x*(q*t - m*(2 + t)*x)",
        "s*sqrt(2 + t)*x^(3/2)",
        "(0, inf)",
        "",
        "1/x",
        IMAGE,
        AtZero::NotReached,
    ),
    (
        "(1 + t)^2/x",
        "1 + t",
        "(0, inf)",
        "",
        "x^2",
        IMAGE,
        AtZero::NotReached,
    ),
    (
        "x^3*s^2*(1 + t)*(1/x - 1) - x^2*(m*(1 + t) - k*(1/x - 1))",
        "s*sqrt(1 + t)*x^2*sqrt(1/x - 1)",
        "(0, 1]",
        AS_EQUATION,
        "2*(1 - x)/(s^2*x)",
        IMAGE,
        AtZero::Reflected,
    ),
];

#[test]
fn square_root_processes_are_found_in_many_coordinates() {
    for (drift, noise, domain, rule, through, law, at_zero) in FOUND {
        let planned = planned(drift, noise, domain, rule);
        let group = only(&planned);
        let what = format!("{drift}, {noise}: {:?}", group.reasons);
        let Method::SquareRoot(step) = &group.method else {
            panic!("{what}")
        };
        let forward = planned.plan.coordinates[0].forward;
        assert_eq!(planned.model.pool.format(forward), through, "{what}");
        assert_eq!((group.law, step.at_zero), (Some(law), at_zero), "{what}");
        assert!(group.preserves_domain, "{what}");
    }
}

/// Why each of these is not stepped by a square-root law.
#[test]
fn what_has_no_settled_law_is_refused_with_a_reason() {
    for (drift, noise, domain, rule, reason) in [
        // Both the stopped and the reflected process satisfy the equation below exponent 1/2.
        (
            "q*x",
            "s*x^0.3",
            "[0, inf)",
            AS_EQUATION,
            "at_edge = \"absorb\"",
        ),
        (
            "q*x",
            "s*x^g",
            "[0, inf)",
            AS_EQUATION,
            "at_edge = \"absorb\"",
        ),
        ("0", "s", "[0, inf)", AS_EQUATION, "at_edge = \"absorb\""),
        // The square of a square-root process: zero for ever is a solution too.
        (
            "2*sqrt(x)*(m - k*sqrt(x)) + s^2*sqrt(x)",
            "2*s*x^(3/4)",
            "[0, inf)",
            AS_EQUATION,
            "at_edge",
        ),
        // Explosion where the reciprocal reaches 0.
        ("q*x^2", "s*x^(3/2)", "(0, inf)", "", "infinite"),
        (
            "q - k*x",
            "s*sqrt(x)",
            "[0, inf)",
            REFLECT,
            "only where that is positive",
        ),
        (
            "k*(m - x)",
            "s*sqrt(x)",
            "[0, inf)",
            "at_edge = \"as_equation\"\nthrough = \"sqrt(x)\"",
            "without `through`",
        ),
        // A coordinate whose values doubles cannot tell apart.
        ("q*x", "s*x^(1 - 1e-9)", "(0, inf)", "", "double precision"),
        (
            "k*(m - x) + 1e-9*sqrt(x)",
            "s*sqrt(x)",
            "[0, inf)",
            AS_EQUATION,
            "",
        ),
        ("k*(m - x)", "s*x^(3/4)", "[0, inf)", AS_EQUATION, ""),
        (
            "k*(m*(1 + t) - x)",
            "s*sqrt(x)",
            "[0, inf)",
            AS_EQUATION,
            "dimension 4*k*m*(t + 1)/s^2 depends on time",
        ),
        ("k*(m - min(x, 5))", "s*sqrt(x)", "(0, inf)", "", ""),
    ] {
        let planned = planned(drift, noise, domain, rule);
        let group = only(&planned);
        assert!(!group.is_exact(), "{drift}, {noise}");
        assert!(
            group.reasons[0].contains(reason),
            "{drift}, {noise}: {}",
            group.reasons[0]
        );
    }
}

/// An open end that may be reached: paths stop there, count as having left, and the author is told.
#[test]
fn an_open_end_that_may_be_reached_is_left() {
    let planned = planned("m - k*x", "s*sqrt(x)", "(0, inf)", "");
    let group = only(&planned);
    assert!(group.is_exact() && !group.preserves_domain);
    assert_eq!(group.law, Some(STOPPED));
    let warned = |d: &driftwright::diagnostic::Diagnostic| d.code == Code::OpenEndReached;
    assert!(planned.found.iter().any(warned), "{:?}", planned.found);
}

/// A state whose noise is shared with a square-root process and is not a multiple of its root leaves it without a law to
/// draw from; with a driver of its own the process is stepped by itself, and so it is where it carries the state.
#[test]
fn a_driver_shared_with_another_state_rules_the_law_out() {
    let with = |driver: &str, noise: &str| {
        plan(&format!(
            "{PARAMETERS}[states.v]\ninitial = \"0.1\"\ndrift = \"k*(m - v)\"\n\
             diffusion = {{ W = \"s*sqrt(v)\" }}\ndomain = \"[0, inf)\"\nat_edge = \"as_equation\"\n\
             [states.L]\ninitial = \"0\"\ndrift = \"-v/2\"\ndiffusion = {{ {driver} = \"{noise}\" }}\n"
        ))
    };
    let shared = with("W", "1 + v");
    assert!(shared.plan.groups.iter().all(|g| !g.is_exact()));
    let reasons = &shared.plan.groups[0].reasons;
    assert!(reasons[0].contains("shared or correlated"), "{reasons:?}");
    for (driver, noise) in [("B", "1 + v"), ("W", "sqrt(v)")] {
        let apart = with(driver, noise);
        let exact: Vec<bool> = apart.plan.groups.iter().map(Group::is_exact).collect();
        assert_eq!(exact, [true, false], "{driver} {noise}");
    }
}
