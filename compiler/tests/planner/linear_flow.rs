//! Commuting linear flows: found, with the map they are moved by, and not found where matrices do not commute.

use crate::support::{Planned, plan};
use driftwright::scheme::Becomes;

/// The plan of two states with these drifts and noises by W and by B.
fn planned(drift: [&str; 2], w: [&str; 2], b: [&str; 2], more: &str) -> Planned {
    let mut text = "[model]\nname = \"m\"\ndrivers = [\"W\", \"B\"]\n[correlation]\nW.B = \"rho\"\n[parameters]\n\
        s = { value = 0.3, range = \"(0, inf)\" }\nk = { value = 0.7, range = \"(0, inf)\" }\n\
        q = { value = 0.2, range = \"(-inf, inf)\" }\nrho = { value = 0.5, range = \"[-1, 1]\" }\n"
        .to_owned();
    for (i, state) in ["x", "y"].into_iter().enumerate() {
        text += &format!(
            "[states.{state}]\ninitial = \"0.6\"\ndrift = \"{}\"\ndiffusion = {{ W = \"{}\", B = \"{}\" }}\n{more}\n",
            drift[i],
            w[i],
            b[i],
            more = more.replace("STATE", state),
        );
    }
    plan(&text)
}

type Equation = ([&'static str; 2], [&'static str; 2], [&'static str; 2]);

const NONE: [&str; 2] = ["0", "0"];

const FOUND: [Equation; 8] = [
    (["-s^2*x/2", "-s^2*y/2"], ["-s*y", "s*x"], NONE),
    (["q*x", "q*y"], ["-s*y + 1e-9*x", "s*x + 1e-9*y"], NONE),
    (["q*x - k*y", "q*y + k*x"], ["q*x", "q*y"], ["-s*y", "s*x"]),
    (
        ["q*x - k*y", "q*y + k*x"],
        ["-k*y", "k*x"],
        ["q*x - s*y", "q*y + s*x"],
    ),
    // An ellipse.
    (["q*x", "q*y"], ["-s*y", "k*x"], NONE),
    (["q*x + k*y", "q*y + k*x"], ["s*y", "s*x"], ["q*x", "q*y"]),
    (["q*x + k*y", "q*y"], ["k*x + s*y", "k*y"], NONE),
    // Eigenvectors that are not the axes.
    (["q*x", "q*y"], ["k*x + 2*s*y", "3*s*x + k*y + s*y"], NONE),
];

#[test]
fn they_are_found() {
    for (drift, w, b) in FOUND {
        let planned = planned(drift, w, b, "");
        let groups = &planned.plan.groups;
        let what = format!("{drift:?} {w:?} {b:?}: {:?}", groups[0].reasons);
        assert_eq!(groups.len(), 1, "{what}");
        assert_eq!(groups[0].becomes, Some(Becomes::LinearFlow), "{what}");
        assert!(groups[0].is_exact(), "{what}");
    }
}

#[test]
fn what_does_not_commute_is_not_called_one() {
    for (drift, w, b) in [
        (["-s^2*x/2", "-s^2*y/2 + 1e-9*y"], ["-s*y", "s*x"], NONE),
        (["q*x", "q*y"], ["-s*y", "s*x"], ["k*x", "0"]),
        (["q*x", "q*y"], ["-s*y", "s*x"], ["k*y", "k*x"]),
        (["q*x - k*y", "k*x"], ["-s*y", "s*x"], NONE),
        (["q*x + 1e-9*x^3", "q*y"], ["-s*y", "s*x"], NONE),
        (["q*x", "q*y"], ["-s*y + 1e-9*x*y", "s*x"], NONE),
        (["q*x + 1", "q*y"], ["-s*y", "s*x"], NONE),
        // What this does hangs on the sign of q.
        (["q*x", "q*y"], ["-q*y", "x"], NONE),
    ] {
        let planned = planned(drift, w, b, "");
        assert!(!planned.plan.groups[0].is_exact(), "{drift:?} {w:?} {b:?}");
    }
    let (drift, w, b) = FOUND[0];
    for more in [
        "domain = \"(0, inf)\"",
        "through = \"2*STATE\"",
        "scheme = \"milstein\"",
    ] {
        let planned = planned(drift, w, b, more);
        assert!(!planned.plan.groups[0].is_exact(), "{more}");
    }
}
