//! Notation as LaTeX mathematics (with amsmath).

use super::name::greek_name;
use super::{Called, Name, Notation};

/// Functions that LaTeX has a command for.
const COMMANDS: [&str; 13] = [
    "exp", "log", "sin", "cos", "tan", "sinh", "cosh", "tanh", "arcsin", "arccos", "arctan", "min",
    "max",
];

/// The text between `$` and `$`.
pub(in crate::report) fn latex(notation: &Notation) -> String {
    match notation {
        Notation::Number(digits) => digits.clone(),
        Notation::Name(name) => identifier(name),
        Notation::Sign(sign) => match sign.as_str() {
            "∘" => r"\circ ".to_owned(),
            other => escape(other),
        },
        Notation::Words(words) if words == "e" => r"\mathrm{e}".to_owned(),
        Notation::Words(words) => format!(r"\text{{{}}}", escape(words)),
        Notation::Verbatim(text) => format!(r"\text{{\ttfamily {}}}", escape(text)),
        Notation::Sum(terms) => sum(terms),
        Notation::Product(factors) => product(factors),
        Notation::Fraction(above, below) => {
            format!(r"\frac{{{}}}{{{}}}", latex(above), latex(below))
        }
        Notation::Negative(inner) => format!("-{}", latex(inner)),
        Notation::Power(base, exponent) => format!("{{{}}}^{{{}}}", latex(base), latex(exponent)),
        Notation::Root(3, inner) => format!(r"\sqrt[3]{{{}}}", latex(inner)),
        Notation::Root(_, inner) => format!(r"\sqrt{{{}}}", latex(inner)),
        Notation::Call(called, arguments) => call(called, arguments),
        Notation::Bars(inner) => format!(r"\left|{}\right|", latex(inner)),
        Notation::Fenced(inner) => format!(r"\left({}\right)", latex(inner)),
        Notation::Differential(name) => format!(r"\,\mathrm{{d}}{}", identifier(name)),
        Notation::Partial(along) => partial(along),
        Notation::Covariation(x, y) => format!(
            r"\frac{{\mathrm{{d}}\langle {}, {}\rangle}}{{\mathrm{{d}}t}}",
            identifier(x),
            identifier(y)
        ),
    }
}

fn identifier(name: &Name) -> String {
    let base = letters(&name.base);
    match name.below.as_slice() {
        [] => base,
        below => {
            let below: Vec<String> = below.iter().map(|text| letters(text)).collect();
            format!("{base}_{{{}}}", below.join(","))
        }
    }
}

/// One letter as it is, several as a word, Greek by its command.
fn letters(text: &str) -> String {
    let mut characters = text.chars();
    match (characters.next(), characters.next()) {
        (Some(only), None) => match greek_name(only) {
            Some(name) => format!("\\{name} "),
            None if only.is_ascii() => escape(text),
            None => format!(r"\text{{{}}}", escape(text)),
        },
        _ if text.chars().all(|c| c.is_ascii_digit()) => text.to_owned(),
        _ => format!(r"\mathit{{{}}}", escape(text)),
    }
}

fn sum(terms: &[(bool, Notation)]) -> String {
    let mut out = String::new();
    for (i, (negative, term)) in terms.iter().enumerate() {
        match (i, negative) {
            (0, false) => {}
            (_, true) => out.push('-'),
            (_, false) => out.push('+'),
        }
        out.push_str(&latex(term));
    }
    out
}

fn product(factors: &[Notation]) -> String {
    let mut out = String::new();
    for (i, factor) in factors.iter().enumerate() {
        let text = latex(factor);
        if i > 0 && text.starts_with(|c: char| c.is_ascii_digit()) {
            out.push_str(r"\cdot ");
        } else if i > 0 && !matches!(factors[i - 1], Notation::Sign(_)) {
            out.push_str(r"\,");
        }
        out.push_str(&text);
    }
    out
}

fn call(called: &Called, arguments: &[Notation]) -> String {
    let mut name = match called.name.as_str() {
        "Φ" => r"\Phi".to_owned(),
        "φ" => r"\varphi".to_owned(),
        known if COMMANDS.contains(&known) => format!("\\{known}"),
        other => format!(r"\operatorname{{{}}}", escape(other)),
    };
    if called.inverse {
        name.push_str("^{-1}");
    }
    let list: Vec<String> = arguments.iter().map(latex).collect();
    format!(r"{name}\left({}\right)", list.join(", "))
}

fn partial(along: &[(Name, u8)]) -> String {
    let order: u8 = along.iter().map(|(_, n)| n).sum();
    let power = |n: u8| {
        if n == 1 {
            String::new()
        } else {
            format!("^{n}")
        }
    };
    let below: Vec<String> = along
        .iter()
        .map(|(name, n)| format!(r"\partial {}{}", identifier(name), power(*n)))
        .collect();
    format!(
        r"\frac{{\partial{}}}{{{}}}",
        power(order),
        below.join(r"\,")
    )
}

/// Text whose characters LaTeX would read as commands. Letters beyond Latin have no font in a plain
/// installation and are named by their code point.
pub(in crate::report) fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '\\' => out.push_str(r"\textbackslash{}"),
            '^' => out.push_str(r"\textasciicircum{}"),
            '~' => out.push_str(r"\textasciitilde{}"),
            '<' => out.push_str(r"\ensuremath{<}"),
            '>' => out.push_str(r"\ensuremath{>}"),
            '&' | '%' | '$' | '#' | '_' | '{' | '}' => out.extend(['\\', c]),
            c if c.is_ascii() || ('\u{a0}'..='\u{17f}').contains(&c) => out.push(c),
            c => match greek_name(c) {
                Some(name) => out.push_str(&format!(r"\ensuremath{{\{name}}}")),
                None => out.push_str(&format!("[U+{:04X}]", u32::from(c))),
            },
        }
    }
    out
}
