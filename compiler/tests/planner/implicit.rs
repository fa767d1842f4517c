//! The drift-implicit scheme on request: in which coordinate, how its equation is solved, and why not.

use crate::support::{Planned, plan};
use driftwright::diagnostic::Code;
use driftwright::scheme::{Implicit, Method, Order, SchemeName};

const HEAD: &str = "[model]\nname = \"m\"\ndrivers = [\"W\"]\n[parameters]\n\
    k = { value = 1.2, range = \"(0, inf)\" }\nm = { value = 0.5, range = \"(0, inf)\" }\n\
    s = { value = 0.4, range = \"(0, inf)\" }\n[assumptions]\nfeller = \"2*k*m >= s^2\"\n";

fn planned(drift: &str, noise: &str, more: &str) -> Planned {
    plan(&format!(
        "{HEAD}[states.x]\ninitial = \"0.5\"\ndrift = \"{drift}\"\ndiffusion = \"{noise}\"\n\
         scheme = \"drift_implicit_euler\"\n{more}\n"
    ))
}

const POSITIVE: &str = "domain = \"(0, inf)\"";

#[test]
fn coordinates_with_constant_noise() {
    let (one, half) = (Some(Order::ONE), Some(Order::HALF));
    for (drift, noise, more, coordinate, quadratic, order) in [
        ("k*(m - x)", "s*sqrt(x)", POSITIVE, "sqrt(x)", true, half),
        (
            "k*(m - x) + s^2/2",
            "s*sqrt(x)",
            POSITIVE,
            "sqrt(x)",
            true,
            one,
        ),
        ("k*(m - x)", "s*x^(7/10)", POSITIVE, "x^0.3", false, one),
        ("k*(m - x)", "s*x", POSITIVE, "log(x)", false, one),
        ("k*x*(m - x)", "s*x", POSITIVE, "log(x)", false, one),
        ("x - x^3", "s", "", "x", false, one),
        ("1/x - k*x", "s", POSITIVE, "x", true, None),
        ("2*s^2/x - k*x", "s", POSITIVE, "x", true, one),
        (
            "k*(m - x)",
            "s*x",
            "domain = \"(0, inf)\"\nthrough = \"2*log(x)\"",
            "2*log(x)",
            false,
            one,
        ),
    ] {
        let planned = planned(drift, noise, more);
        assert!(
            planned.found.iter().all(|d| !d.is_error()),
            "{:?}",
            planned.found
        );
        let group = &planned.plan.groups[0];
        assert_eq!(group.scheme, SchemeName::DriftImplicitEuler, "{drift}");
        assert_eq!(group.strong_order, order, "{drift}, {noise}");
        assert!(group.preserves_domain, "{drift}, {noise}");
        let forward = planned.plan.coordinates[0].forward;
        assert_eq!(planned.model.pool.format(forward), coordinate);
        let Method::Step(steps) = &group.method else {
            panic!("{group:?}");
        };
        let found = matches!(steps[0].implicit, Some(Implicit::Quadratic { .. }));
        assert_eq!(found, quadratic, "{drift}, {noise}");
    }
}

#[test]
fn what_is_refused() {
    for (drift, noise, more, reason) in [
        // Below dimension 1 the root's drift goes to minus infinity at 0, and its slope to plus infinity.
        ("s^2/8 - k*x", "s*sqrt(x)", POSITIVE, "one-sided Lipschitz"),
        ("1 - k*x", "s", POSITIVE, "does not go to infinity"),
        ("x^3", "s", "", "one-sided Lipschitz"),
        ("k*(m - x)", "sqrt(s + x^4)", "", "no coordinate"),
        ("-abs(x)", "s", "", "kink"),
        (
            "k*(m - x)",
            "s*sqrt(x)",
            "domain = \"[0, inf)\"\nat_edge = \"reflect\"",
            "absorbed or reflected",
        ),
    ] {
        let planned = planned(drift, noise, more);
        let refused = planned.found.iter().find(|d| d.code == Code::SchemeRefused);
        let message = &refused.expect("a refusal").message;
        assert!(message.contains(reason), "{message}");
        assert_ne!(
            planned.plan.groups[0].scheme,
            SchemeName::DriftImplicitEuler
        );
    }
}

/// Without a request: in a coordinate where the drift is too steep for explicit schemes, and where no end is reached (rows 3 to
/// 6 of the choice by Feller's test and Lamperti's coordinate: Neuenkirch and Szpruch 2014).
#[test]
fn chosen_where_only_it_keeps_the_state_inside() {
    let choice = |drift: &str, noise: &str, more: &str| {
        plan(&format!(
            "{HEAD}[states.x]\ninitial = \"0.5\"\ndrift = \"{drift}\"\ndiffusion = \"{noise}\"\n{more}\n"
        ))
    };
    let unit = "domain = \"(0, 1)\"";
    for (drift, noise, more, coordinate) in [
        ("k*(m - x) - x^2", "s*sqrt(x)", POSITIVE, "sqrt(x)"),
        ("k*(m - x)", "s*x^(7/10)", POSITIVE, "x^0.3"),
        ("k*(m - x)", "s*x^(3/2)", POSITIVE, "sqrt(1/x)"),
        ("k*(m - x)", "s*x", POSITIVE, "log(x)"),
        ("k*(1/2 - x)", "s*x*(1 - x)", unit, "log(x/(1 - x))"),
    ] {
        let planned = choice(drift, noise, more);
        let group = &planned.plan.groups[0];
        assert_eq!(
            group.scheme,
            SchemeName::DriftImplicitEuler,
            "{drift}, {noise}"
        );
        assert!(group.preserves_domain && group.strong_order.is_some());
        let forward = planned.plan.coordinates[0].forward;
        assert_eq!(planned.model.pool.format(forward), coordinate);
        let rejected: Vec<_> = group.rejected.iter().map(|(name, _)| *name).collect();
        let explicit = [
            SchemeName::EulerMaruyama,
            SchemeName::Milstein,
            SchemeName::TamedMilstein,
        ];
        assert!(
            explicit.iter().all(|name| rejected.contains(name)),
            "{rejected:?}"
        );
        assert!(planned.found.iter().all(|d| d.code != Code::OpenEndReached));
    }
    for (drift, noise, more) in [
        // Reached, or not known not to be.
        ("k*m/9 - x^2", "s*sqrt(x)", POSITIVE),
        ("m - 1 - x^2", "s*sqrt(x)", POSITIVE),
        // Lipschitz in the logarithm: Milstein there.
        ("k*x/(1 + x)", "s*x/(1 + x)", POSITIVE),
        // The noise depends on the state in each coordinate.
        ("k*(m - x)", "s*x/(1 + x)", POSITIVE),
        ("x - x^3", "s", ""),
        (
            "k*(m - x)",
            "s*x",
            "domain = \"[0, inf)\"\nat_edge = \"absorb\"",
        ),
    ] {
        let planned = choice(drift, noise, more);
        assert_ne!(
            planned.plan.groups[0].scheme,
            SchemeName::DriftImplicitEuler,
            "{drift}, {noise}"
        );
    }
}
