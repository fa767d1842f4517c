//! Formulas as a person sets them: fractions, powers, roots and named functions, for the writers that can
//! typeset.
//!
//! A formula is set from the text that the pool prints ([`Pool::format`]): the order of terms, the choice
//! of a quotient over a negative power and the named parts of long formulas are decided there, once, so
//! that every form of a report shows the same formula.

mod broken;
mod latex;
mod mathml;
mod name;
mod operator;
mod read;

use super::document::{Math, Term};
use crate::symbolic::{Expr, Node, Pool};

pub(super) use latex::{escape as escape_latex, latex};
pub(super) use mathml::{escape as escape_html, mathml};
pub(super) use name::Name;

/// A piece of mathematics as it is set.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Notation {
    /// Digits.
    Number(String),
    /// A variable.
    Name(Name),
    /// A sign or a word between: `=`, `+`, `dt` apart from its neighbours.
    Sign(String),
    /// Words, upright.
    Words(String),
    /// Terms, each with whether it is subtracted.
    Sum(Vec<(bool, Notation)>),
    /// Factors side by side.
    Product(Vec<Notation>),
    /// One over the other.
    Fraction(Box<Notation>, Box<Notation>),
    /// A minus before something.
    Negative(Box<Notation>),
    /// Base and exponent.
    Power(Box<Notation>, Box<Notation>),
    /// The square root (2) or the cube root (3).
    Root(u8, Box<Notation>),
    /// A function of arguments.
    Call(Called, Vec<Notation>),
    /// Between bars: the absolute value.
    Bars(Box<Notation>),
    /// In brackets.
    Fenced(Box<Notation>),
    /// `d` of a name.
    Differential(Name),
    /// The partial derivative operator along names, each with how often.
    Partial(Vec<(Name, u8)>),
    /// `d<x, y>/dt`.
    Covariation(Name, Name),
    /// What stays in the grammar of the model file: text that is cut.
    Verbatim(String),
}

/// A function's name as it is set: a letter or a word, perhaps inverse.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Called {
    /// The name.
    pub(super) name: String,
    /// Whether the inverse of that function is meant.
    pub(super) inverse: bool,
}

/// A formula as the author wrote it.
pub(super) fn written(pool: &Pool, text: &str) -> Row {
    read::formula(pool, text)
}

impl std::fmt::Display for Called {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let inverse = if self.inverse { "⁻¹" } else { "" };
        write!(f, "{}{inverse}", self.name)
    }
}

impl Notation {
    /// A formula of the pool.
    pub(super) fn of(pool: &Pool, e: Expr) -> Row {
        read::formula(pool, &pool.format(e))
    }

    /// How wide it is, in characters, roughly.
    pub(super) fn width(&self) -> usize {
        let all = |parts: &[Notation]| parts.iter().map(Notation::width).sum::<usize>();
        match self {
            Self::Number(text) | Self::Sign(text) | Self::Words(text) | Self::Verbatim(text) => {
                text.chars().count()
            }
            Self::Name(name) => name.width(),
            Self::Sum(terms) => terms.iter().map(|(_, t)| t.width() + 3).sum(),
            Self::Product(factors) => all(factors) + factors.len() / 3,
            Self::Fraction(above, below) => above.width().max(below.width()),
            Self::Negative(inner) | Self::Root(_, inner) => 1 + inner.width(),
            Self::Power(base, exponent) => base.width() + exponent.width() * 2 / 3,
            Self::Call(called, arguments) => called.name.chars().count() + 2 + all(arguments),
            Self::Bars(inner) | Self::Fenced(inner) => 2 + inner.width(),
            Self::Differential(name) => 1 + name.width(),
            Self::Partial(_) => 3,
            Self::Covariation(x, y) => 5 + x.width() + y.width(),
        }
    }

    /// Whether it needs brackets where it is a factor or the base of a power.
    fn is_loose(&self, as_base: bool) -> bool {
        match self {
            Self::Sum(_) | Self::Negative(_) => true,
            Self::Product(_) | Self::Fraction(..) | Self::Power(..) | Self::Call(..) => as_base,
            _ => false,
        }
    }

    /// Itself, in brackets where it needs them as a factor.
    fn factor(self) -> Self {
        if self.is_loose(false) {
            Self::Fenced(Box::new(self))
        } else {
            self
        }
    }

    /// Itself, in brackets where it needs them as the base of a power.
    fn base(self) -> Self {
        if self.is_loose(true) {
            Self::Fenced(Box::new(self))
        } else {
            self
        }
    }
}

/// Mathematics in a row, and the parts that its names stand for.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Row {
    /// From left to right.
    pub(super) pieces: Vec<Notation>,
    /// Named parts of a long formula, in the order in which they build on each other.
    pub(super) parts: Vec<(Name, Notation)>,
}

impl Row {
    fn push(&mut self, piece: Notation) {
        self.pieces.push(piece);
    }

    fn append(&mut self, other: Row) {
        self.pieces.extend(other.pieces);
        self.parts.extend(other.parts);
    }

    /// How wide it is, in characters, roughly.
    pub(super) fn width(&self) -> usize {
        self.pieces.iter().map(Notation::width).sum()
    }
}

/// A row of the neutral document.
pub(super) fn row(pool: &Pool, math: &Math) -> Row {
    let mut row = Row::default();
    for term in math {
        match term {
            Term::Formula(e) => row.append(Notation::of(pool, *e)),
            Term::Factor(e) => {
                let mut factor = Notation::of(pool, *e);
                if matches!(*pool.node(*e), Node::Sum(_)) {
                    let inner = std::mem::take(&mut factor.pieces);
                    factor.pieces = inner.into_iter().map(Notation::factor).collect();
                }
                row.append(factor);
            }
            Term::Differential(name) => row.push(Notation::Differential(Name::new(pool, name))),
            Term::Name(text) | Term::Symbol(text) => row.push(operator::read(pool, text)),
        }
    }
    row
}
