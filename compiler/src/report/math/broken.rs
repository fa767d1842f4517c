//! Lines: where a formula that is wider than one may be broken.
//!
//! The terms of a sum stand apart, whatever their width. A part that is wider than a line is opened: a
//! product shows its factors, a fraction becomes `(...)/(...)`, a root a power, until all pieces fit.

use super::{Notation, Row};

impl Row {
    /// The pieces between which a line may be broken; none is wider than `line` characters that can be opened.
    pub(in crate::report) fn broken(&self, line: usize) -> Vec<Notation> {
        let mut pieces = Vec::new();
        for piece in &self.pieces {
            match piece {
                Notation::Sum(terms) => sum(terms, line, &mut pieces),
                other => open(other, line, &mut pieces),
            }
        }
        pieces
    }
}

fn sign(text: &str) -> Notation {
    Notation::Sign(text.to_owned())
}

fn sum(terms: &[(bool, Notation)], line: usize, pieces: &mut Vec<Notation>) {
    for (i, (negative, term)) in terms.iter().enumerate() {
        if *negative {
            pieces.push(sign("-"));
        } else if i > 0 {
            pieces.push(sign("+"));
        }
        open(term, line, pieces);
    }
}

/// Appends a part, opened if it is too wide.
fn open(part: &Notation, line: usize, pieces: &mut Vec<Notation>) {
    if part.width() <= line {
        pieces.push(part.clone());
        return;
    }
    match part {
        Notation::Sum(terms) => sum(terms, line, pieces),
        Notation::Product(factors) => factors.iter().for_each(|f| open(f, line, pieces)),
        Notation::Negative(inner) => {
            pieces.push(sign("-"));
            open(inner, line, pieces);
        }
        Notation::Fenced(inner) => fenced(inner, line, sign(")"), pieces),
        Notation::Fraction(above, below) => {
            fenced(above, line, sign(")"), pieces);
            pieces.push(sign("/"));
            fenced(below, line, sign(")"), pieces);
        }
        Notation::Power(base, exponent) => {
            let inner = match base.as_ref() {
                Notation::Fenced(inner) => inner,
                other => other,
            };
            let close = Notation::Power(Box::new(sign(")")), exponent.clone());
            fenced(inner, line, close, pieces);
        }
        Notation::Root(degree, inner) => {
            let exponent = Notation::Fraction(
                Box::new(Notation::Number("1".to_owned())),
                Box::new(Notation::Number(degree.to_string())),
            );
            let close = Notation::Power(Box::new(sign(")")), Box::new(exponent));
            fenced(inner, line, close, pieces);
        }
        Notation::Call(called, arguments) => {
            pieces.push(Notation::Words(called.to_string()));
            pieces.push(sign("("));
            for (i, argument) in arguments.iter().enumerate() {
                if i > 0 {
                    pieces.push(sign(","));
                }
                open(argument, line, pieces);
            }
            pieces.push(sign(")"));
        }
        Notation::Bars(inner) => {
            pieces.push(sign("|"));
            open(inner, line, pieces);
            pieces.push(sign("|"));
        }
        other => pieces.push(other.clone()),
    }
}

fn fenced(inner: &Notation, line: usize, close: Notation, pieces: &mut Vec<Notation>) {
    pieces.push(sign("("));
    open(inner, line, pieces);
    pieces.push(close);
}
