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
    for (drift, noise, more, coordinate, quadratic) in [
        ("k*(m - x)", "s*sqrt(x)", POSITIVE, "sqrt(x)", true),
        ("k*(m - x)", "s*x^(7/10)", POSITIVE, "x^0.3", false),
        ("k*(m - x)", "s*x", POSITIVE, "log(x)", false),
        ("k*x*(m - x)", "s*x", POSITIVE, "log(x)", false),
        ("x - x^3", "s", "", "x", false),
        ("1/x - k*x", "s", POSITIVE, "x", true),
        (
            "k*(m - x)",
            "s*x",
            "domain = \"(0, inf)\"\nthrough = \"2*log(x)\"",
            "2*log(x)",
            false,
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
        assert_eq!(group.strong_order, Some(Order::ONE));
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
