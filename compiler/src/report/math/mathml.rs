//! Notation as MathML Core (W3C), the part of MathML that browsers set themselves.

use super::{Called, Name, Notation};

/// A space between factors that would run together: between words, and before a function.
const THIN_SPACE: &str = "<mspace width=\"0.17em\"/>";
const INVISIBLE_TIMES: &str = "<mo>&#x2062;</mo>";

/// The elements that go inside `<math>`.
pub(in crate::report) fn mathml(notation: &Notation) -> String {
    match notation {
        Notation::Number(digits) => format!("<mn>{digits}</mn>"),
        Notation::Name(name) => identifier(name),
        Notation::Sign(sign) => format!("<mo>{}</mo>", escape(&sign.replace('-', "−"))),
        Notation::Words(words) => format!("<mtext>{}</mtext>", escape(words)),
        Notation::Verbatim(text) => format!("<mtext class=\"verbatim\">{}</mtext>", escape(text)),
        Notation::Sum(terms) => row(&sum(terms)),
        Notation::Product(factors) => row(&product(factors)),
        Notation::Fraction(above, below) => {
            format!("<mfrac>{}{}</mfrac>", mathml(above), mathml(below))
        }
        Notation::Negative(inner) => row(&format!("<mo>−</mo>{}", mathml(inner))),
        Notation::Power(base, exponent) => {
            format!("<msup>{}{}</msup>", mathml(base), mathml(exponent))
        }
        Notation::Root(3, inner) => format!("<mroot>{}<mn>3</mn></mroot>", mathml(inner)),
        Notation::Root(_, inner) => format!("<msqrt>{}</msqrt>", mathml(inner)),
        Notation::Call(called, arguments) => row(&call(called, arguments)),
        Notation::Bars(inner) => row(&format!(
            "<mo form=\"prefix\">|</mo>{}<mo form=\"postfix\">|</mo>",
            mathml(inner)
        )),
        Notation::Fenced(inner) => row(&fenced(&mathml(inner))),
        Notation::Differential(name) => row(&differential(name)),
        Notation::Partial(along) => partial(along),
        Notation::Covariation(x, y) => format!(
            "<mfrac>{}{}</mfrac>",
            row(&format!(
                "<mi mathvariant=\"normal\">d</mi><mo form=\"prefix\" rspace=\"0\">⟨</mo>{}<mo>,</mo>{}<mo form=\"postfix\" lspace=\"0\">⟩</mo>",
                identifier(x),
                identifier(y)
            )),
            "<mrow><mi mathvariant=\"normal\">d</mi><mi>t</mi></mrow>"
        ),
    }
}

fn row(inner: &str) -> String {
    format!("<mrow>{inner}</mrow>")
}

fn fenced(inner: &str) -> String {
    format!(
        "<mo form=\"prefix\" rspace=\"0\">(</mo>{inner}<mo form=\"postfix\" lspace=\"0\">)</mo>"
    )
}

fn identifier(name: &Name) -> String {
    let part = |text: &str| {
        if text.chars().all(|c| c.is_ascii_digit()) {
            format!("<mn>{text}</mn>")
        } else {
            format!("<mi>{}</mi>", escape(text))
        }
    };
    let base = part(&name.base);
    let below: Vec<String> = name.below.iter().map(|text| part(text)).collect();
    match below.as_slice() {
        [] => base,
        [only] => format!("<msub>{base}{only}</msub>"),
        several => format!("<msub>{base}{}</msub>", row(&several.join("<mo>,</mo>"))),
    }
}

fn sum(terms: &[(bool, Notation)]) -> String {
    let mut out = String::new();
    for (i, (negative, term)) in terms.iter().enumerate() {
        match (i, negative) {
            (0, false) => {}
            (_, true) => out.push_str("<mo>−</mo>"),
            (_, false) => out.push_str("<mo>+</mo>"),
        }
        out.push_str(&mathml(term));
    }
    out
}

fn product(factors: &[Notation]) -> String {
    let mut out = String::new();
    for (i, factor) in factors.iter().enumerate() {
        if let Some(before) = i.checked_sub(1).map(|i| &factors[i]) {
            out.push_str(between(before, factor));
        }
        out.push_str(&mathml(factor));
    }
    out
}

/// What stands between two factors.
fn between(before: &Notation, factor: &Notation) -> &'static str {
    let starts_with_digits = |n: &Notation| match n {
        Notation::Number(_) => true,
        Notation::Power(base, _) => matches!(**base, Notation::Number(_)),
        _ => false,
    };
    match (before, factor) {
        (Notation::Sign(_), _) => "",
        (_, factor) if starts_with_digits(factor) => "<mo>·</mo>",
        (before, factor) if is_word(before) || is_word(factor) => THIN_SPACE,
        _ => INVISIBLE_TIMES,
    }
}

/// Whether a factor runs into its neighbour: words and functions do.
fn is_word(notation: &Notation) -> bool {
    match notation {
        Notation::Name(name) => name.base.chars().count() > 1,
        Notation::Call(..) | Notation::Words(_) | Notation::Fraction(..) => true,
        Notation::Power(base, _) => is_word(base),
        _ => false,
    }
}

fn call(called: &Called, arguments: &[Notation]) -> String {
    let name = format!("<mi mathvariant=\"normal\">{}</mi>", escape(&called.name));
    let name = if called.inverse {
        format!("<msup>{name}<mrow><mo>−</mo><mn>1</mn></mrow></msup>")
    } else {
        name
    };
    let list: Vec<String> = arguments.iter().map(mathml).collect();
    format!(
        "{name}<mo>&#x2061;</mo>{}",
        fenced(&list.join("<mo>,</mo>"))
    )
}

fn differential(name: &Name) -> String {
    format!("<mi mathvariant=\"normal\">d</mi>{}", identifier(name))
}

fn partial(along: &[(Name, u8)]) -> String {
    let order: u8 = along.iter().map(|(_, n)| n).sum();
    let power = |inner: String, n: u8| match n {
        1 => inner,
        n => format!("<msup>{inner}<mn>{n}</mn></msup>"),
    };
    let below: String = along
        .iter()
        .map(|(name, n)| format!("<mo>∂</mo>{}", power(identifier(name), *n)))
        .collect();
    format!(
        "<mfrac>{}{}</mfrac>",
        power("<mo>∂</mo>".to_owned(), order),
        row(&below)
    )
}

/// Text inside an element or a quoted attribute.
pub(in crate::report) fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            c => out.push(c),
        }
    }
    out
}
