//! From the text of a formula to its notation.

use super::{Called, Name, Notation, Row};
use crate::front::formula::{Ast, AstKind, Factor, parse};
use crate::front::text::MappedText;
use crate::symbolic::Pool;

/// Exponents of `e` that are wider than this are set as `exp(...)`.
const WIDEST_EXPONENT: usize = 24;

/// A formula with its named parts, `F where p1 = ...; p2 = ...`. What cannot be read back, since it was
/// cut, stays as it is.
pub(super) fn formula(pool: &Pool, text: &str) -> Row {
    let (whole, named) = match text.split_once(" where ") {
        Some((whole, named)) => (whole, named.split("; ").collect()),
        None => (text, Vec::new()),
    };
    let parts = named.into_iter().map(|part| {
        let (name, definition) = part.split_once(" = ")?;
        Some((Name::new(pool, name), notation(pool, definition)?))
    });
    match (notation(pool, whole), parts.collect::<Option<Vec<_>>>()) {
        (Some(whole), Some(parts)) => Row {
            pieces: vec![whole],
            parts,
        },
        _ => Row {
            pieces: vec![Notation::Verbatim(text.to_owned())],
            parts: Vec::new(),
        },
    }
}

fn notation(pool: &Pool, text: &str) -> Option<Notation> {
    let ast = parse(&MappedText::plain(text, 0)).ok()?;
    Some(Reader { pool, text }.read(&ast))
}

/// Reads trees of one text.
struct Reader<'a> {
    pool: &'a Pool,
    text: &'a str,
}

impl Reader<'_> {
    fn read(&self, ast: &Ast) -> Notation {
        match &ast.kind {
            AstKind::Number(_) => number(&self.text[ast.span.start..ast.span.end]),
            AstKind::Name(name) => Notation::Name(Name::new(self.pool, name)),
            AstKind::Call {
                name, arguments, ..
            } => call(name, arguments.iter().map(|a| self.read(a)).collect()),
            AstKind::Sum(terms) => {
                let term = |t: &crate::front::formula::Term| {
                    let value = self.read(&t.value);
                    // A term that is itself a sum was in brackets.
                    let value = match value {
                        Notation::Sum(_) => Notation::Fenced(Box::new(value)),
                        other => other,
                    };
                    (t.negative, value)
                };
                Notation::Sum(terms.iter().map(term).collect())
            }
            AstKind::Product(factors) => self.product(factors),
            AstKind::Negate(inner) => {
                let inner = self.read(inner);
                match inner {
                    Notation::Sum(_) => Notation::Negative(Box::new(inner.factor())),
                    other => Notation::Negative(Box::new(other)),
                }
            }
            AstKind::Power(base, exponent) => Notation::Power(
                Box::new(self.read(base).base()),
                Box::new(self.read(exponent)),
            ),
        }
    }

    /// A product; what it is divided by stands below a line.
    fn product(&self, factors: &[Factor]) -> Notation {
        let side = |inverse: bool| -> Vec<Notation> {
            let of_side = factors.iter().filter(|f| f.inverse == inverse);
            of_side.map(|f| self.read(&f.value)).collect()
        };
        let (above, below) = (beside(side(false)), side(true));
        if below.is_empty() {
            return above;
        }
        // A minus stands before the fraction.
        match above {
            Notation::Negative(inner) => {
                Notation::Negative(Box::new(Notation::Fraction(inner, Box::new(beside(below)))))
            }
            above => Notation::Fraction(Box::new(above), Box::new(beside(below))),
        }
    }
}

/// Digits; what is written with an exponent becomes a power of ten.
fn number(digits: &str) -> Notation {
    let lower = digits.to_ascii_lowercase();
    let Some((mantissa, exponent)) = lower.split_once('e') else {
        return Notation::Number(digits.to_owned());
    };
    let ten = Notation::Power(
        Box::new(Notation::Number("10".to_owned())),
        Box::new(Notation::Number(exponent.replace('-', "−"))),
    );
    Notation::Product(vec![Notation::Number(mantissa.to_owned()), ten])
}

/// Factors side by side, in brackets where they need them.
fn beside(mut factors: Vec<Notation>) -> Notation {
    match factors.len() {
        0 => Notation::Number("1".to_owned()),
        1 => factors.remove(0),
        _ => {
            // A minus stands before the whole product.
            if let Notation::Negative(first) = &factors[0] {
                factors[0] = first.as_ref().clone();
                return Notation::Negative(Box::new(beside(factors)));
            }
            Notation::Product(factors.into_iter().map(Notation::factor).collect())
        }
    }
}

fn call(name: &str, mut arguments: Vec<Notation>) -> Notation {
    let one = arguments.len() == 1;
    let called = |name: &str, inverse| Called {
        name: name.to_owned(),
        inverse,
    };
    match name {
        "sqrt" if one => Notation::Root(2, Box::new(arguments.remove(0))),
        "cbrt" if one => Notation::Root(3, Box::new(arguments.remove(0))),
        "abs" if one => Notation::Bars(Box::new(arguments.remove(0))),
        "exp" if one && arguments[0].width() <= WIDEST_EXPONENT => {
            let e = Notation::Words("e".to_owned());
            Notation::Power(Box::new(e), Box::new(arguments.remove(0)))
        }
        "normal_cdf" => Notation::Call(called("Φ", false), arguments),
        "normal_quantile" => Notation::Call(called("Φ", true), arguments),
        "normal_pdf" => Notation::Call(called("φ", false), arguments),
        // The inverse functions as ISO 80000-2 writes them.
        "asin" | "acos" | "atan" => {
            Notation::Call(called(&format!("arc{}", &name[1..]), false), arguments)
        }
        "asinh" | "acosh" | "atanh" => {
            Notation::Call(called(&format!("ar{}", &name[1..]), false), arguments)
        }
        "sign" => Notation::Call(called("sgn", false), arguments),
        other => Notation::Call(called(other, false), arguments),
    }
}
