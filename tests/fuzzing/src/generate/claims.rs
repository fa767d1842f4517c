//! Claims of every kind, true and false.

use std::fmt::Write as _;

use super::draw::Draw;
use super::{Names, Scope, formula};

const LAWS: [&str; 6] = [
    "normal",
    "lognormal",
    "noncentral_chi_square",
    "joint_normal",
    "transformed_normal",
    "deterministic",
];

pub(super) fn claims(draw: &mut Draw<'_>, names: &Names, text: &mut String) {
    text.push_str("[claims]\n");
    // A claim made at random is mostly wrong, which ends a compilation.
    if !draw.one_in(3) {
        return;
    }
    for name in draw.prefix(&["first", "second", "third"], 1) {
        let claim = claim(draw, names);
        writeln!(text, "{name} = {{ {claim} }}").expect("a string takes all text");
    }
}

fn claim(draw: &mut Draw<'_>, names: &Names) -> String {
    let of = subject(draw, names);
    let smooth = formula::smooth(draw, names, Scope::Derived, 2);
    match draw.below(7) {
        0 => format!("mean_of = \"{of}\", is = \"{}\"", value(draw, names)),
        1 => format!("variance_of = \"{of}\", is = \"{}\"", value(draw, names)),
        2 => {
            let other = subject(draw, names);
            let is = value(draw, names);
            format!("covariance_of = [\"{of}\", \"{other}\"], is = \"{is}\"")
        }
        3 => format!("martingale = \"{smooth}\""),
        4 => {
            let is = formula::formula(draw, names, Scope::Derived, 2);
            format!("drift_of = \"{smooth}\", is = \"{is}\"")
        }
        5 => {
            let parts: Vec<String> = names
                .drivers
                .iter()
                .map(|driver| {
                    let is = formula::formula(draw, names, Scope::Derived, 2);
                    format!("{driver} = \"{is}\"")
                })
                .collect();
            format!(
                "diffusion_of = \"{smooth}\", is = {{ {} }}",
                parts.join(", ")
            )
        }
        _ => format!("law_of = \"{of}\", is = \"{}\"", draw.pick(&LAWS)),
    }
}

/// What has a mean: a name, or a formula.
fn subject(draw: &mut Draw<'_>, names: &Names) -> String {
    let known: Vec<&str> = [&names.states, &names.derived, &names.readouts]
        .into_iter()
        .flatten()
        .copied()
        .collect();
    match draw.below(4) {
        0 | 1 => draw.pick(&known).to_owned(),
        2 => format!("exp({})", draw.pick(&names.states)),
        _ => formula::formula(draw, names, Scope::Derived, 2),
    }
}

/// A moment: a formula in time and parameters.
fn value(draw: &mut Draw<'_>, names: &Names) -> String {
    match draw.below(4) {
        0 => "0.5*exp(a*t)".to_owned(),
        1 => "rho^2*t".to_owned(),
        _ => formula::formula(draw, names, Scope::Time, 3),
    }
}
