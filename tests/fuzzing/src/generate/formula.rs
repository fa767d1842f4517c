//! Random formulas.

use super::draw::Draw;
use super::{Names, Scope};

const SMOOTH: [&str; 20] = [
    "exp",
    "log",
    "sqrt",
    "sin",
    "cos",
    "tan",
    "tanh",
    "sinh",
    "cosh",
    "asinh",
    "atan",
    "cbrt",
    "normal_cdf",
    "normal_pdf",
    "erf",
    "asin",
    "acos",
    "atanh",
    "acosh",
    "normal_quantile",
];

/// A formula whose operations nest up to `depth` levels.
pub(super) fn formula(draw: &mut Draw<'_>, names: &Names, scope: Scope, depth: usize) -> String {
    nested(draw, names, scope, depth, true)
}

/// One without kinks.
pub(super) fn smooth(draw: &mut Draw<'_>, names: &Names, scope: Scope, depth: usize) -> String {
    nested(draw, names, scope, depth, false)
}

fn nested(draw: &mut Draw<'_>, names: &Names, scope: Scope, depth: usize, kinks: bool) -> String {
    if depth == 0 {
        return leaf(draw, names, scope);
    }
    let inner = |draw: &mut Draw<'_>| nested(draw, names, scope, depth - 1, kinks);
    match draw.below(15) {
        0..=2 => leaf(draw, names, scope),
        3 => format!("{} + {}", inner(draw), inner(draw)),
        4 => format!("{} - ({})", inner(draw), inner(draw)),
        5 | 6 => format!("({})*({})", inner(draw), inner(draw)),
        7 => format!("({})/({})", inner(draw), inner(draw)),
        8 => {
            let power = draw.pick(&["2", "3", "-1", "(1/2)", "-2", "(3/2)", "(-1/3)", "5", "0.7"]);
            format!("({})^{power}", inner(draw))
        }
        9 => format!("({})^({})", inner(draw), inner(draw)),
        10 => format!("-({})", inner(draw)),
        11 if kinks => {
            let function = draw.pick(&["min", "max"]);
            format!("{function}({}, {})", inner(draw), inner(draw))
        }
        12 if kinks => {
            let function = draw.pick(&["abs", "sign"]);
            format!("{function}({})", inner(draw))
        }
        _ => {
            let function = draw.pick(&SMOOTH);
            format!("{function}({})", inner(draw))
        }
    }
}

fn leaf(draw: &mut Draw<'_>, names: &Names, scope: Scope) -> String {
    let mut known: Vec<&str> = names.parameters.clone();
    if scope != Scope::Parameters {
        known.push("t");
    }
    if matches!(scope, Scope::States | Scope::Derived) {
        known.extend(names.states.iter().chain(&names.wheres));
    }
    if scope == Scope::Derived {
        known.extend(&names.derived);
    }
    // States and what rests on them are declared last and asked for most.
    known.reverse();
    match draw.below(8) {
        6 => draw.number(),
        7 => draw.pick(&["pi", "1", "0", "2"]).to_owned(),
        _ if known.is_empty() => draw.number(),
        _ => draw.pick(&known).to_owned(),
    }
}
