//! Parameters and the assumptions on them.

use std::fmt::Write as _;

use super::draw::Draw;
use super::{Names, Scope, formula, put};

pub(super) fn parameters(draw: &mut Draw<'_>, names: &mut Names, text: &mut String) {
    text.push_str("[parameters]\nrho = { value = 0.25, range = \"[-1, 1]\" }\n");
    names.parameters.push("rho");
    for name in draw.prefix(&["a", "b", "c", "sigma", "kappa"], 1) {
        names.parameters.push(name);
        let line = match draw.below(24) {
            23 => format!(
                "{{ value = {}, unit = \"{}\" }}",
                draw.number(),
                draw.pick(&["1", "EUR", "1/year", "m^2/s", "year^(-1/2)"])
            ),
            0..=6 => format!(
                "{{ value = 0.5, range = \"{}\" }}",
                draw.pick(&["(0, inf)", "[0, 1]", "[0, inf)", "(0, 1)"])
            ),
            7..=12 => draw.number(),
            13..=16 => format!("-{}", draw.number()),
            17..=19 => format!("{{ value = {}, about = \"a \\\\ b\" }}", draw.number()),
            _ => format!(
                "{{ range = \"{}\" }}",
                draw.pick(&["(0, inf)", "(0, 1]", "(-inf, inf)", "[0.5, 0.9)"])
            ),
        };
        writeln!(text, "{name} = {line}").expect("a string takes all text");
    }
    text.push_str("[assumptions]\n");
    for name in draw.prefix(&["calm", "bound"], 0) {
        let relation = draw.pick(&[">", ">=", "<", "<="]);
        let left = match draw.below(4) {
            3 => formula::formula(draw, names, Scope::Parameters, 2),
            _ => draw.pick(&["rho", "2*rho", "a^2", "a + rho"]).to_owned(),
        };
        let right = formula::formula(draw, names, Scope::Parameters, 1);
        put(text, name, &format!("{left} {relation} {right}"));
    }
}
