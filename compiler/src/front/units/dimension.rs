//! Dimensions: products of units and unknowns to rational powers.

use std::collections::BTreeMap;
use std::rc::Rc;

use crate::symbolic::Rational;

/// What a dimension is made of.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Atom {
    /// A unit the author named: an opaque symbol.
    Unit(Rc<str>),
    /// A dimension not known yet, by its number.
    Unknown(usize),
}

/// A product of powers of atoms; none is the dimension of pure numbers. No exponent is zero.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub(super) struct Dimension(BTreeMap<Atom, Rational>);

impl Dimension {
    /// The dimension of pure numbers.
    pub(super) fn one() -> Self {
        Self::default()
    }

    /// A single atom.
    pub(super) fn atom(atom: Atom) -> Self {
        Self(BTreeMap::from([(atom, Rational::ONE)]))
    }

    /// Whether it is that of pure numbers.
    pub(super) fn is_one(&self) -> bool {
        self.0.is_empty()
    }

    /// The atoms with their exponents.
    pub(super) fn atoms(&self) -> impl Iterator<Item = (&Atom, &Rational)> {
        self.0.iter()
    }

    /// The unknowns with their exponents.
    pub(super) fn unknowns(&self) -> impl Iterator<Item = (usize, &Rational)> {
        self.0.iter().filter_map(|(atom, exponent)| match atom {
            Atom::Unit(_) => None,
            Atom::Unknown(number) => Some((*number, exponent)),
        })
    }

    /// Multiplies by `other ^ exponent`.
    pub(super) fn multiply(&mut self, other: &Self, exponent: &Rational) {
        for (atom, power) in &other.0 {
            let sum = self.0.entry(atom.clone()).or_insert(Rational::ZERO);
            *sum += power * exponent;
            if *sum == Rational::ZERO {
                self.0.remove(atom);
            }
        }
    }

    /// Its power.
    pub(super) fn power(&self, exponent: &Rational) -> Self {
        let mut result = Self::one();
        result.multiply(self, exponent);
        result
    }

    /// Divided by another.
    pub(super) fn over(&self, other: &Self) -> Self {
        let mut result = self.clone();
        result.multiply(other, &-Rational::ONE);
        result
    }

    /// Without an atom.
    pub(super) fn without(&self, atom: &Atom) -> Self {
        let mut result = self.clone();
        result.0.remove(atom);
        result
    }

    /// As text that the parser of units reads back, `name` spelling the unknowns.
    pub(super) fn show(&self, name: &dyn Fn(usize) -> String) -> String {
        let (mut above, mut below) = (Vec::new(), Vec::new());
        for (atom, exponent) in &self.0 {
            let text = match atom {
                Atom::Unit(unit) => unit.to_string(),
                Atom::Unknown(number) => name(*number),
            };
            if *exponent > Rational::ZERO {
                above.push(with_exponent(&text, exponent));
            } else {
                below.push(with_exponent(&text, &-exponent.clone()));
            }
        }
        let above = if above.is_empty() {
            "1".to_owned()
        } else {
            above.join("*")
        };
        match &below[..] {
            [] if self.is_one() => "a pure number".to_owned(),
            [] => above,
            [one] => format!("{above}/{one}"),
            several => format!("{above}/({})", several.join("*")),
        }
    }
}

fn with_exponent(text: &str, exponent: &Rational) -> String {
    if *exponent == Rational::ONE {
        text.to_owned()
    } else if exponent.is_int() {
        format!("{text}^{exponent}")
    } else {
        format!("{text}^({exponent})")
    }
}
