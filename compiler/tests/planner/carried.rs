//! States that a square-root process carries: found in any coordinate, refused where the noise has another form, and
//! the schemes that an author may ask for.

use crate::support::{Planned, plan};
use driftwright::diagnostic::Code;
use driftwright::scheme::{Drawn, Group, Method, SchemeName};

const HEAD: &str = "[model]\nname = \"m\"\ndrivers = [\"W\", \"B\", \"U\"]\n[parameters]\n\
    k = { value = 1.2, range = \"(0, inf)\" }\nm = { value = 0.05, range = \"(0, inf)\" }\n\
    s = { value = 0.4, range = \"(0, inf)\" }\nq = { value = 0.3, range = \"(-1, 1)\" }\n\
    loose = 0.4\n[correlation]\nW.B = \"q\"\n";

const VARIANCE: &str = "[states.v]\ninitial = \"0.04\"\ndrift = \"k*(m - v)\"\ndiffusion = { B = \"s*sqrt(v)\" }\n\
    domain = \"[0, inf)\"\nat_edge = \"as_equation\"\n";

fn state(name: &str, drift: &str, noise: &str, more: &str) -> String {
    format!(
        "[states.{name}]\ninitial = \"1/2\"\ndrift = \"{drift}\"\ndiffusion = {{ {noise} }}\n{more}\n"
    )
}

fn planned(states: &[&str]) -> Planned {
    plan(&format!("{HEAD}{}", states.concat()))
}

fn group_of<'a>(planned: &'a Planned, state: &str) -> &'a Group {
    let index = planned.model.states.iter().position(|s| s.name == state);
    &planned.plan.groups[planned.plan.group_of(index.expect("a state"))]
}

fn is_refused(planned: &Planned) -> bool {
    planned.found.iter().any(|d| d.code == Code::SchemeRefused)
}

const POSITIVE: &str = "domain = \"(0, inf)\"";

#[test]
fn what_is_carried() {
    for (drift, noise, more, grows) in [
        ("0.01*x", "W = \"sqrt(v)*x\"", POSITIVE, true),
        // The mean does not grow like the exponential of the coordinate: another drift in the variance.
        ("(0.01 + v)*x", "W = \"sqrt(v)*x\"", POSITIVE, false),
        (
            "0.01*x",
            "W = \"0.3*sqrt(v)*x\", U = \"sqrt(2*v)*x\"",
            POSITIVE,
            true,
        ),
        ("k*(1 - x)*x + v", "W = \"sqrt(v)\"", "", false),
        ("-v", "", "", false),
        ("0.5*v", "U = \"sqrt(v)\"", "", false),
    ] {
        let x = state("x", drift, noise, more);
        let planned = planned(&[&x, VARIANCE]);
        let (carried, variance) = (group_of(&planned, "x"), group_of(&planned, "v"));
        assert_eq!(
            carried.scheme,
            SchemeName::ConditionalGaussian,
            "{drift}, {noise}"
        );
        assert!(variance.is_exact() && !carried.is_exact());
        let Method::Carried(step) = &carried.method else {
            panic!("{carried:?}");
        };
        assert_eq!(step.states[0].keeps_growth, grows, "{drift}, {noise}");
        assert_eq!((carried.strong_order, carried.weak_order), (None, None));
    }
}

/// Two prices with one variance share a step; a third state that reads them has no order any more.
#[test]
fn several_states_and_their_readers() {
    let first = state("x", "0", "W = \"sqrt(v)*x\"", POSITIVE);
    let second = state("y", "0.02*y", "B = \"sqrt(3*v)*y\"", POSITIVE);
    let reader = state("a", "x + y", "", "");
    let planned = planned(&[&first, &second, VARIANCE, &reader]);
    assert_eq!(group_of(&planned, "x").states.len(), 2);
    assert!(group_of(&planned, "v").is_exact());
    let reader = group_of(&planned, "a");
    assert_eq!((reader.strong_order, reader.weak_order), (None, None));
}

#[test]
fn what_is_not() {
    let elastic = state("x", "0", "W = \"sqrt(v)*x^(7/10)\"", POSITIVE);
    let moving = state("x", "0", "W = \"(1 + t)*sqrt(v)*x\"", POSITIVE);
    let linear = state("x", "0", "W = \"v*x\"", POSITIVE);
    // In the logit the drift is v times a function of x.
    let share = state("x", "0", "W = \"sqrt(v)*x*(1 - x)\"", "domain = \"(0, 1)\"");
    let curved = state("x", "v^2*x", "W = \"sqrt(v)*x\"", POSITIVE);
    let loose = VARIANCE.replace("s*sqrt", "loose*sqrt");
    let price = state("x", "0", "W = \"sqrt(v)*x\"", POSITIVE);
    for (x, v) in [
        (&elastic, VARIANCE),
        (&moving, VARIANCE),
        (&linear, VARIANCE),
        (&curved, VARIANCE),
        (&share, VARIANCE),
        (&price, &loose),
    ] {
        let planned = planned(&[x, v]);
        assert_ne!(
            group_of(&planned, "x").scheme,
            SchemeName::ConditionalGaussian,
            "{x}"
        );
        assert!(!group_of(&planned, "v").is_exact(), "{x}");
    }
    // A rate that shares the variance's noise is not carried, and then nothing is.
    let rate = state("r", "k*(m - r)", "B = \"s\"", "");
    let planned = planned(&[&price, VARIANCE, &rate]);
    assert_eq!(
        group_of(&planned, "v").scheme,
        SchemeName::FullTruncationEuler
    );
}

#[test]
fn what_an_author_may_ask_for() {
    let price = state("x", "0", "W = \"sqrt(v)*x\"", POSITIVE);
    let asked = |scheme: &str| format!("{VARIANCE}scheme = \"{scheme}\"\n");
    let by_moments = planned(&[&price, &asked("quadratic_exponential")]);
    let variance = group_of(&by_moments, "v");
    assert_eq!(variance.scheme, SchemeName::QuadraticExponential);
    assert!(!variance.is_exact() && variance.law.is_none());
    let Method::SquareRoot(step) = &variance.method else {
        panic!("{variance:?}");
    };
    assert!(matches!(&step.draw, Drawn::ByMoments(unit) if unit.len() == 3));
    assert_eq!(
        group_of(&by_moments, "x").scheme,
        SchemeName::ConditionalGaussian
    );

    let truncated = planned(&[&price, &asked("full_truncation_euler")]);
    assert_ne!(
        group_of(&truncated, "x").scheme,
        SchemeName::ConditionalGaussian
    );
    assert_eq!(
        group_of(&truncated, "v").scheme,
        SchemeName::FullTruncationEuler
    );

    let absorbed = asked("quadratic_exponential").replace("as_equation", "absorb");
    for states in [
        vec![absorbed.as_str()],
        vec![
            &price,
            "[states.v]\ninitial = \"1\"\ndrift = \"-v\"\ndiffusion = { B = \"1\" }\nscheme = \"quadratic_exponential\"\n",
        ],
    ] {
        let refused = planned(&states);
        assert!(is_refused(&refused), "{states:?}");
    }
    let plain = state(
        "x",
        "0",
        "W = \"x\"",
        "domain = \"(0, inf)\"\nscheme = \"conditional_gaussian\"",
    );
    assert!(is_refused(&planned(&[&plain])));
}
