//! Brownian motions with a random drift, and their distances from the start, in many coordinates: found, or refused
//! with a reason.

use crate::support::{Planned, plan};
use driftwright::scheme::{Becomes, Group, Law, SchemeName};

const PARAMETERS: &str = "[model]\nname = \"m\"\ndrivers = [\"W\", \"B\"]\n[parameters]\n\
    mu = { value = 0.7, range = \"(0, inf)\" }\ns = { value = 0.3, range = \"(0, inf)\" }\n\
    k = { value = 0.4, range = \"(0, inf)\" }\nq = { value = 0.2, range = \"(-inf, inf)\" }\n";

/// The plan of a state with this equation; `more` holds further lines.
fn planned(drift: &str, noise: &str, domain: &str, more: &str) -> Planned {
    plan(&format!(
        "{PARAMETERS}[states.x]\ninitial = \"{}\"\ndrift = \"{drift}\"\ndiffusion = {{ W = \"{noise}\" }}\n\
         domain = \"{domain}\"\n{more}\n",
        match domain {
            "(1, inf)" => "1.6",
            "(-inf, 0)" => "-0.6",
            _ => "0.6",
        },
    ))
}

fn only(planned: &Planned) -> &Group {
    let [group] = &planned.plan.groups[..] else {
        panic!("{:#?}", planned.plan.groups)
    };
    group
}

const LINE: &str = "(-inf, inf)";
const HALF: &str = "(0, inf)";

/// Equation and domain; coordinate and law. Each by Ito's rule from `du = m tanh(m u/s^2 + c) dt + s dW` or
/// `du = m coth(m u/s^2) dt + s dW`.
const FOUND: [(&str, &str, &str, &str, Law); 21] = [
    ("mu*tanh(mu*x + q)", "1", LINE, "x", Law::GaussianMixture),
    (
        "mu*tanh(mu*x/s^2 + q)",
        "s",
        LINE,
        "x",
        Law::GaussianMixture,
    ),
    (
        "s*mu*tanh(mu*x + q)",
        "sqrt(s/1)",
        LINE,
        "x",
        Law::GaussianMixture,
    ),
    ("q*tanh(q*x + k)", "1", LINE, "x", Law::GaussianMixture),
    (
        "mu*sinh(mu*x)/cosh(mu*x)",
        "-1",
        LINE,
        "x",
        Law::GaussianMixture,
    ),
    (
        "mu*(exp(2*mu*x) - k)/(exp(2*mu*x) + k)",
        "1",
        LINE,
        "x",
        Law::GaussianMixture,
    ),
    (
        "mu - 2*mu*k*exp(-mu*x)/(k*exp(-mu*x) + exp(mu*x))",
        "1",
        LINE,
        "x",
        Law::GaussianMixture,
    ),
    (
        "x*(mu*tanh(mu*log(x)/s^2 + q) + s^2/2)",
        "s*x",
        HALF,
        "log(x)",
        Law::TransformedGaussianMixture,
    ),
    (
        "x*(mu*(x^(2*mu) - k)/(x^(2*mu) + k) + 1/2)",
        "x",
        HALF,
        "log(x)",
        Law::TransformedGaussianMixture,
    ),
    (
        "x*(1 - x)*(mu*tanh(mu*log(x/(1 - x))) + (1 - 2*x)/2)",
        "x*(1 - x)",
        "(0, 1)",
        "log(x/(1 - x))",
        Law::TransformedGaussianMixture,
    ),
    (
        "sqrt(1 + x^2)*mu*tanh(mu*asinh(x) + q) + x/2",
        "sqrt(1 + x^2)",
        LINE,
        "asinh(x)",
        Law::TransformedGaussianMixture,
    ),
    (
        "mu*tanh(mu*sinh(x))/cosh(x) - tanh(x)/(2*cosh(x)^2)",
        "1/cosh(x)",
        LINE,
        "sinh(x)",
        Law::TransformedGaussianMixture,
    ),
    ("mu/tanh(mu*x)", "1", HALF, "x", Law::BesselWithDrift),
    ("mu/tanh(mu*x/s^2)", "s", HALF, "x", Law::BesselWithDrift),
    (
        "mu*cosh(mu*x)/sinh(mu*x)",
        "1",
        "[0, inf)",
        "x",
        Law::BesselWithDrift,
    ),
    (
        "mu/tanh(mu*(x - 1))",
        "1",
        "(1, inf)",
        "x - 1",
        Law::BesselWithDrift,
    ),
    (
        "mu/tanh(mu*x)",
        "1",
        "(-inf, 0)",
        "-x",
        Law::BesselWithDrift,
    ),
    (
        "mu*(1 + 2/(exp(2*mu*x) - 1))",
        "1",
        HALF,
        "x",
        Law::BesselWithDrift,
    ),
    (
        "x*(mu/tanh(mu*log(x)) + 1/2)",
        "x",
        "(1, inf)",
        "mu*log(x)",
        Law::TransformedBesselWithDrift,
    ),
    (
        "2*sqrt(x)*mu/tanh(mu*sqrt(x)) + 1",
        "2*sqrt(x)",
        HALF,
        "mu*sqrt(x)",
        Law::TransformedBesselWithDrift,
    ),
    (
        "mu*exp(-x)/tanh(mu*exp(x)) - exp(-2*x)/2",
        "exp(-x)",
        LINE,
        "mu*exp(x)",
        Law::TransformedBesselWithDrift,
    ),
];

#[test]
fn they_are_found_in_any_coordinate() {
    let mut wrong = Vec::new();
    for (drift, noise, domain, coordinate, law) in FOUND {
        let more = match domain.starts_with('[') {
            true => "at_edge = \"as_equation\"\n",
            false => "",
        };
        let planned = planned(drift, noise, domain, more);
        let group = only(&planned);
        let forward = planned
            .model
            .pool
            .format(planned.plan.coordinates[0].forward);
        if group.law != Some(law) || forward != coordinate {
            wrong.push(format!(
                "{drift}: {:?} in {forward}: {:?}",
                group.law, group.reasons
            ));
        }
    }
    assert!(wrong.is_empty(), "{wrong:#?}");
}

/// What is close to the class and not in it: the pole inside the domain or at the wrong place, a slope of the wrong sign,
/// another speed, an end that is reached.
#[test]
fn what_is_not_one_is_not_called_one() {
    for (drift, noise, domain) in [
        ("mu*tanh(mu*x + q)", "1 + 1e-9", LINE),
        ("mu*tanh((mu + 1e-9)*x + q)", "1", LINE),
        ("-mu*tanh(mu*x + q)", "1", LINE),
        ("mu*tanh(mu*x + q) + 1e-9", "1", LINE),
        ("mu*tanh(mu*x + q)", "1", HALF),
        ("mu/tanh(mu*x + q)", "1", LINE),
        ("mu/tanh(mu*(x + 1))", "1", HALF),
        ("mu/tanh(mu*(x - 1))", "1", HALF),
        ("-mu/tanh(mu*x)", "1", HALF),
        ("mu/tanh(mu*x)", "1 + 1e-9", HALF),
        ("(mu + 1e-9)/tanh(mu*x)", "1", HALF),
        ("mu*tan(-mu*x)", "1", "(-pi/2, pi/2)"),
        ("mu*(exp(2*mu*x) + k)/(exp(2*mu*x) - k)", "1", LINE),
        ("q*tanh(k*x)", "1", LINE),
    ] {
        let planned = planned(drift, noise, domain, "");
        assert!(!only(&planned).is_exact(), "{drift} on {domain}");
    }
}

#[test]
fn a_start_on_an_absorbing_end_is_not_left() {
    let start = |initial: &str| {
        let text = format!(
            "{PARAMETERS}[states.x]\ninitial = \"{initial}\"\ndrift = \"mu/tanh(mu*x)\"\ndiffusion = {{ W = \"1\" }}\n\
             domain = \"[0, inf)\"\nat_edge = \"absorb\"\n"
        );
        only(&plan(&text)).is_exact()
    };
    assert!(start("k") && !start("k - k") && !start("max(q, 0)"));
}

#[test]
fn the_authors_coordinate_is_taken_where_it_serves() {
    let drift = "x*(mu*tanh(mu*log(x)) + 1/2)";
    let served = planned(drift, "x", HALF, "through = \"2*log(x) + 1\"");
    assert_eq!(only(&served).becomes, Some(Becomes::RandomDrift));
    let other = planned(drift, "x", HALF, "through = \"sqrt(x)\"");
    let group = only(&other);
    assert!(!group.is_exact());
    let said = group.reasons.join(" ");
    assert!(
        said.contains("would be stepped exactly without `through`"),
        "{said}"
    );
}

#[test]
fn a_driver_shared_with_another_state_rules_the_law_out() {
    let second = |noise: &str| {
        format!("[states.v]\ninitial = \"1\"\ndrift = \"-v*x\"\ndiffusion = {{ {noise} = \"s\" }}")
    };
    let apart = planned("mu*tanh(mu*x)", "1", LINE, &second("B"));
    assert!(apart.plan.groups[0].is_exact());
    let shared = planned("mu*tanh(mu*x)", "1", LINE, &second("W"));
    let group = &shared.plan.groups[0];
    assert!(!group.is_exact());
    let said = group.reasons.join(" ");
    assert!(
        said.contains("shared or correlated with that of v"),
        "{said}"
    );
    assert_ne!(group.scheme, SchemeName::Exact);
}
