//! States: shapes that the analysis knows, with parts replaced, and any others.

use std::fmt::Write as _;

use super::draw::Draw;
use super::{Names, Scope, formula, put};

const DOMAINS: [&str; 8] = [
    "(-inf, inf)",
    "(0, inf)",
    "[0, inf)",
    "(0, 1)",
    "[0, 1]",
    "(-1, 1)",
    "[-1, inf)",
    "(-inf, b]",
];

const SCHEMES: [&str; 10] = [
    "euler_maruyama",
    "milstein",
    "exact",
    "strong_taylor_1_5",
    "drift_implicit_euler",
    "tamed_euler",
    "tamed_milstein",
    "full_truncation_euler",
    "quadratic_exponential",
    "runge_kutta_4",
];

/// The drift, the factor of the noise and the domain of a known shape; `#` is the state.
const SHAPES: [(&str, &str, &str); 16] = [
    ("a*#", "rho*#", "(0, inf)"),
    ("a*(1 - #)", "rho", "(-inf, inf)"),
    ("a*(1 - #)", "rho*sqrt(#)", "[0, inf)"),
    ("a", "1", "(-inf, inf)"),
    ("0", "#^(3/4)", "[0, inf)"),
    ("a*#*(1 - #)", "rho*#*(1 - #)", "(0, 1)"),
    ("a*(1/2 - #)", "rho*sqrt(#*(1 - #))", "[0, 1]"),
    ("# - #^3", "a", "(-inf, inf)"),
    ("a*t*#", "exp(-t)*#", "(0, inf)"),
    ("a*(sin(2*pi*t) - #)", "1 + t", "(-inf, inf)"),
    ("-#/2", "sqrt(1 - #^2)", "[-1, 1]"),
    (
        "a^2*#/2 + a*sqrt(1 + #^2)",
        "a*sqrt(1 + #^2)",
        "(-inf, inf)",
    ),
    ("3*#^(1/3)", "3*#^(2/3)", "(0, inf)"),
    ("#*(a - log(#))", "rho*#", "(0, inf)"),
    ("rho + a/#", "1", "(0, inf)"),
    ("-a*abs(#)", "max(#, 0)", "(-inf, inf)"),
];

pub(super) fn states(draw: &mut Draw<'_>, names: &Names, text: &mut String) {
    for name in &names.states {
        state(draw, names, name, text);
    }
}

fn state(draw: &mut Draw<'_>, names: &Names, name: &str, text: &mut String) {
    writeln!(text, "[states.{name}]").expect("a string takes all text");
    let (drift, noise, domain) = coefficients(draw, names, name);
    put(text, "initial", &initial(draw, names));
    put(text, "drift", &drift);
    diffusion(draw, names, &noise, text);
    put(text, "domain", domain);
    if domain.contains(['[', ']']) && !draw.one_in(8) {
        let words = ["absorb", "reflect", "as_equation"];
        match domain.starts_with('[') && domain.ends_with(']') {
            true => {
                let (lower, upper) = (draw.pick(&words), draw.pick(&words));
                writeln!(
                    text,
                    "at_edge = {{ lower = \"{lower}\", upper = \"{upper}\" }}"
                )
                .expect("a string takes all text");
            }
            false => put(text, "at_edge", draw.pick(&words)),
        }
    }
    if draw.one_in(12) {
        let through = match draw.below(6) {
            0 => format!("log({name})"),
            1 => format!("sqrt({name})"),
            2 => format!("asinh({name})"),
            3 => format!("{name}^3 + {name}"),
            4 => format!("log({name}/(1 - {name}))"),
            _ => formula::smooth(draw, names, Scope::States, 2),
        };
        put(text, "through", &through);
    }
    if draw.one_in(6) {
        let scheme = match draw.below(4) {
            0 | 1 => "euler_maruyama",
            2 => "milstein",
            _ => draw.pick(&SCHEMES),
        };
        put(text, "scheme", scheme);
    }
}

fn coefficients(draw: &mut Draw<'_>, names: &Names, name: &str) -> (String, String, &'static str) {
    let any = |draw: &mut Draw<'_>| formula::formula(draw, names, Scope::States, 3);
    match draw.below(10) {
        0..=5 => {
            let (drift, noise, domain) = draw.pick(&SHAPES);
            let shaped = |shape: &str| shape.replace('#', name);
            (shaped(drift), shaped(noise), domain)
        }
        6 => (linear(draw, names), draw.number(), "(-inf, inf)"),
        7 => (
            linear(draw, names),
            formula::formula(draw, names, Scope::Time, 2),
            "(-inf, inf)",
        ),
        8 => (any(draw), any(draw), "(-inf, inf)"),
        _ => (any(draw), any(draw), draw.pick(&DOMAINS)),
    }
}

/// A sum of multiples of the states.
fn linear(draw: &mut Draw<'_>, names: &Names) -> String {
    let mut sum = draw.pick(&["a", "0", "sin(t)", "rho*t"]).to_owned();
    for state in &names.states {
        match draw.below(4) {
            0 => {}
            1 => write!(sum, " - a*{state}").expect("a string takes all text"),
            2 => write!(sum, " + rho*{state}").expect("a string takes all text"),
            _ => write!(sum, " - {}*{state}", draw.number()).expect("a string takes all text"),
        }
    }
    sum
}

fn initial(draw: &mut Draw<'_>, names: &Names) -> String {
    match draw.below(8) {
        0..=3 => "0.5".to_owned(),
        4 => "rho".to_owned(),
        5 => "0".to_owned(),
        6 => draw.number(),
        _ => formula::formula(draw, names, Scope::Parameters, 2),
    }
}

/// The noise on one driver, or parts of it on several.
fn diffusion(draw: &mut Draw<'_>, names: &Names, noise: &str, text: &mut String) {
    let drivers = match names.drivers.len() {
        0 => return,
        _ if draw.one_in(8) => return,
        _ => &names.drivers,
    };
    let first = draw.below(drivers.len());
    let mut parts = Vec::new();
    for (place, driver) in drivers.iter().enumerate() {
        if place == first {
            parts.push(format!("{driver} = \"{noise}\""));
        } else if draw.one_in(3) {
            let part = match draw.below(3) {
                0 => format!("rho*({noise})"),
                1 => draw.number(),
                _ => formula::formula(draw, names, Scope::States, 2),
            };
            parts.push(format!("{driver} = \"{part}\""));
        }
    }
    writeln!(text, "diffusion = {{ {} }}", parts.join(", ")).expect("a string takes all text");
}
