//! States that nothing random reaches, at the ends of their domains: an exact solution or Runge-Kutta only
//! where no rule of an end can act.

use crate::support::{Planned, plan};
use driftwright::diagnostic::Code;
use driftwright::scheme::{EdgeRule, Group, Law, Method, Order, SchemeName};

/// A model of one state without noise.
fn calm(initial: &str, drift: &str, more: &str) -> Planned {
    plan(&format!(
        "[model]\nname = \"m\"\n[parameters]\nk = {{ value = 3, range = \"(0, inf)\" }}\nm = 0.2\n\
         [states.X]\ninitial = \"{initial}\"\ndrift = \"{drift}\"\n{more}\n"
    ))
}

fn only(planned: &Planned) -> &Group {
    let [group] = &planned.plan.groups[..] else {
        panic!("{:#?}", planned.plan.groups)
    };
    assert_eq!(group.law, Some(Law::Deterministic));
    group
}

const ABSORB: &str = "domain = \"[0, inf)\"\nat_edge = \"absorb\"";
const REFLECT: &str = "domain = \"[0, inf)\"\nat_edge = \"reflect\"";

/// The drift at the end tells whether it is reached: inward or zero like the distance, it is not (the
/// solution of a linear equation is unique).
#[test]
fn a_linear_equation_is_solved_where_no_rule_can_act() {
    for (initial, drift, rule, exact) in [
        ("0.5", "-k*(1 - X)", ABSORB, false),
        ("0.5", "-k*(1 - X)", REFLECT, false),
        ("0.5", "m - k*X", ABSORB, false),
        ("0.5", "k*(1 - X)", ABSORB, true),
        ("0.5", "-k*X", ABSORB, true),
        ("0", "k*X", ABSORB, true),
        // From the end itself an absorbed path does not move, although the equation would.
        ("0", "k*(1 - X)", ABSORB, false),
        ("m", "k*(1 - X)", ABSORB, false),
        ("0", "k*(1 - X)", REFLECT, true),
    ] {
        let planned = calm(initial, drift, rule);
        let group = only(&planned);
        assert_eq!(group.is_exact(), exact, "{drift} from {initial}: {rule}");
        assert!(group.preserves_domain);
        if !exact {
            assert_eq!(group.scheme, SchemeName::EulerMaruyama);
            assert_eq!((group.strong_order, group.weak_order), (None, None));
            let Method::Step(steps) = &group.method else {
                panic!("{:?}", group.method)
            };
            let end = planned.model.pool.zero();
            let expected = match rule {
                ABSORB => EdgeRule::Absorb { end },
                _ => EdgeRule::Reflect { end },
            };
            assert_eq!(steps[0].lower, Some(expected));
        }
    }
}

/// Without a rule the equation is solved, and a path that is found outside is counted.
#[test]
fn a_solution_that_may_leave_its_domain_is_watched() {
    for (drift, domain, kept) in [
        ("-k*(1 - X)", "(0, inf)", false),
        ("m - k*X", "(0, inf)", false),
        ("k*(1 - X)", "(0, inf)", true),
        ("-k*(1 - X)", "[0, inf)", false),
        ("k*(1 - X)", "[0, inf)", true),
        ("k", "(-inf, 1]", false),
        ("-k", "(-inf, 1]", true),
    ] {
        let planned = calm("0.5", drift, &format!("domain = \"{domain}\""));
        let group = only(&planned);
        assert!(group.is_exact());
        assert_eq!(group.preserves_domain, kept, "{drift} on {domain}");
    }
}

/// Logistic growth never comes to 0 or 1 (Karlin and Taylor 1981, section 15.6, with no noise); a constant
/// loss does.
#[test]
fn runge_kutta_steps_where_no_rule_can_act() {
    let grows = calm(
        "0.5",
        "X*(1 - X)",
        "domain = \"[0, 1]\"\nat_edge = \"absorb\"",
    );
    let group = only(&grows);
    assert_eq!(
        (group.scheme, group.strong_order),
        (SchemeName::RungeKutta4, Some(Order::FOUR))
    );
    // A long step may lead out all the same.
    assert!(!group.preserves_domain);
    let unruled = calm("0.5", "X*(1 - X)", "domain = \"[0, inf)\"");
    assert_eq!(only(&unruled).strong_order, Some(Order::FOUR));
    let falls = calm("0.5", "X*(1 - X) - 1", ABSORB);
    let group = only(&falls);
    assert_eq!(group.scheme, SchemeName::EulerMaruyama);
    assert!(group.preserves_domain);
    let asked = calm(
        "0.5",
        "X*(1 - X) - 1",
        &format!("{ABSORB}\nscheme = \"runge_kutta_4\""),
    );
    let refused = asked.found.iter().find(|d| d.code == Code::SchemeRefused);
    assert!(refused.is_some_and(|d| d.message.contains("absorbs or reflects")));
}

/// Where `m` may be 0, it is not known what 1/X is at the end that absorbs.
#[test]
fn a_rule_whose_place_in_the_coordinate_is_not_known_is_an_error() {
    let text = |end: &str| {
        let more = format!("domain = \"[{end}, inf)\"\nat_edge = \"absorb\"\nthrough = \"1/X\"");
        let found = calm("10", "-1 - X^2", &more).found;
        found
            .into_iter()
            .filter(|d| d.code == Code::BadCoordinate)
            .count()
    };
    assert_eq!([text("m"), text("k")], [1, 0]);
}
