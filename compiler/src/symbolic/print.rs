//! Formulas as text: in the grammar of the model language, so that they parse again, and in the
//! shape a person would write.

use super::function::Function;
use super::node::{Expr, Node, Rational};
use super::pool::{Pool, Table};
use super::print_number::{digits, parts, splits};
use super::print_parts::LONGEST_WHOLE;

/// How tightly a piece of text binds; a looser piece needs parentheses inside a tighter one.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Binding {
    Sum,
    Product,
    Power,
    Atom,
}

/// A printed part: its text without a leading minus, the sign apart.
#[derive(Clone)]
pub(super) struct Piece {
    negative: bool,
    pub(super) text: String,
    binding: Binding,
}

impl Piece {
    pub(super) fn atom(text: impl Into<String>) -> Piece {
        Piece {
            negative: false,
            text: text.into(),
            binding: Binding::Atom,
        }
    }

    /// The text with its sign, as it stands alone or between commas.
    pub(super) fn alone(&self) -> String {
        if self.negative {
            format!("-{}", self.text)
        } else {
            self.text.clone()
        }
    }

    /// The text, in parentheses if it binds less tightly than `least` or carries a sign.
    fn inside(&self, least: Binding) -> String {
        if self.negative || self.binding < least {
            format!("({})", self.alone())
        } else {
            self.text.clone()
        }
    }
}

impl Pool {
    /// The formula as text that parses to the same value.
    ///
    /// A long formula is written with names for the parts it shares, explained behind it:
    /// `p2^2 + p2 where p1 = ...; p2 = ...`. What is beyond the budget even then
    /// ([`Limit::Printing`](super::Limit::Printing)) is cut, and says so.
    pub fn format(&self, e: Expr) -> String {
        if self.weight(e) > LONGEST_WHOLE {
            return self.format_in_parts(e);
        }
        let mut pieces: Table<Expr, Piece> = Table::default();
        for part in self.postorder(e) {
            let piece = self.piece(part, &pieces);
            pieces.insert(part, piece);
        }
        pieces[&e].alone()
    }

    pub(super) fn piece(&self, e: Expr, done: &Table<Expr, Piece>) -> Piece {
        match &*self.node(e) {
            Node::Number(value) => number_piece(value),
            Node::Pi => Piece::atom("pi"),
            Node::Symbol(symbol) => Piece::atom(&*self.symbol_name(*symbol)),
            Node::Sum(terms) => {
                // A number stands first in a sum and is written last: x + 1.
                let constant = usize::from(self.as_number(terms[0]).is_some());
                let (first, rest) = terms.split_at(constant);
                sum_piece(rest.iter().chain(first).map(|t| &done[t]))
            }
            Node::Product(factors) => self.product_piece(factors, done),
            Node::Power(..) => self.product_piece(&[e], done),
            Node::Call(Function::Expm1Ratio, arguments) => {
                let argument = &done[&arguments[0]];
                let text = format!(
                    "(exp({}) - 1)/{}",
                    argument.alone(),
                    argument.inside(Binding::Power)
                );
                Piece {
                    negative: false,
                    text,
                    binding: Binding::Product,
                }
            }
            Node::Call(function, arguments) => {
                let list: Vec<String> = arguments.iter().map(|a| done[a].alone()).collect();
                Piece::atom(format!("{}({})", function.name(), list.join(", ")))
            }
        }
    }

    /// A product as numerator and denominator.
    fn product_piece(&self, factors: &[Expr], done: &Table<Expr, Piece>) -> Piece {
        let mut negative = false;
        let (mut above, mut below) = (Vec::new(), Vec::new());
        for &factor in factors {
            match &*self.node(factor) {
                Node::Number(value) => {
                    negative = *value < Rational::ZERO;
                    let size = if negative {
                        -value.clone()
                    } else {
                        value.clone()
                    };
                    if splits(&size) {
                        let (top, bottom) = parts(&size);
                        if !size.numerator().is_one() {
                            above.push(top);
                        }
                        below.push(bottom);
                    } else if !size.is_one() {
                        above.push(digits(&size).0);
                    }
                }
                // The base of a power that has a name need not have been written.
                Node::Power(base, exponent) if done.contains_key(base) => match self
                    .as_number(*exponent)
                {
                    Some(n) if n < Rational::ZERO => below.push(self.power_text(*base, -n, done)),
                    Some(n) => above.push(self.power_text(*base, n, done)),
                    None => above.push(symbolic_power_text(&done[base], &done[exponent])),
                },
                _ => above.push(done[&factor].inside(Binding::Product)),
            }
        }
        let simple = below.is_empty() && above.len() == 1;
        let top = if above.is_empty() {
            "1".to_string()
        } else {
            above.join("*")
        };
        let text = match below.len() {
            0 => top,
            1 => format!("{top}/{}", below[0]),
            _ => format!("{top}/({})", below.join("*")),
        };
        let binding = match factors {
            // A lone root or power binds as itself.
            [single] if simple => match &*self.node(*single) {
                Node::Power(_, exponent) if self.as_number(*exponent) == Some(half()) => {
                    Binding::Atom
                }
                _ => Binding::Power,
            },
            _ => Binding::Product,
        };
        Piece {
            negative,
            text,
            binding,
        }
    }

    /// `base^exponent` for a positive exponent, as it stands in a product.
    fn power_text(&self, base: Expr, exponent: Rational, done: &Table<Expr, Piece>) -> String {
        let base = &done[&base];
        if exponent.is_one() {
            return base.inside(Binding::Power);
        }
        if exponent == half() {
            return format!("sqrt({})", base.alone());
        }
        let (text, divides) = digits(&exponent);
        let text = if divides { format!("({text})") } else { text };
        format!("{}^{text}", base.inside(Binding::Atom))
    }
}

fn half() -> Rational {
    Rational::from_parts(1.into(), 2u8.into())
}

/// `base^exponent` for an exponent that is a formula.
fn symbolic_power_text(base: &Piece, exponent: &Piece) -> String {
    format!(
        "{}^{}",
        base.inside(Binding::Atom),
        exponent.inside(Binding::Atom)
    )
}

fn number_piece(value: &Rational) -> Piece {
    let negative = *value < Rational::ZERO;
    let (text, divides) = digits(&if negative {
        -value.clone()
    } else {
        value.clone()
    });
    let binding = if divides {
        Binding::Product
    } else {
        Binding::Atom
    };
    Piece {
        negative,
        text,
        binding,
    }
}

/// The first positive term leads, the others follow in their order.
fn sum_piece<'a>(terms: impl Iterator<Item = &'a Piece>) -> Piece {
    let terms: Vec<&Piece> = terms.collect();
    let first = terms.iter().position(|term| !term.negative).unwrap_or(0);
    let mut text = signed(terms[first]);
    for (i, term) in terms.iter().enumerate() {
        if i != first {
            text.push_str(if term.negative { " - " } else { " + " });
            text.push_str(&unsigned(term));
        }
    }
    Piece {
        negative: false,
        text,
        binding: Binding::Sum,
    }
}

/// A term without its sign; a sum behind a sign needs parentheses.
fn unsigned(term: &Piece) -> String {
    Piece {
        negative: false,
        ..term.clone()
    }
    .inside(Binding::Product)
}

fn signed(term: &Piece) -> String {
    let text = unsigned(term);
    if term.negative {
        format!("-{text}")
    } else {
        text
    }
}
