//! Quotients of polynomials, the denominator kept in factors.

use std::rc::Rc;

use super::super::node::Rational;
use super::poly::{Monomial, Poly};

/// `numerator / product of factor^multiplicity`.
///
/// A factor is no single term, has coprime whole coefficients, a positive last coefficient and no
/// common monomial: what is a single term in a denominator stands in the numerator with negative
/// exponents. Factors are sorted and distinct.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(crate) struct Fraction {
    pub(super) numerator: Poly,
    pub(super) denominator: Denominator,
}

/// The factors of a denominator with their multiplicities.
pub(crate) type Denominator = Vec<(Rc<Poly>, u32)>;

impl Fraction {
    pub(super) fn polynomial(numerator: Poly) -> Fraction {
        Fraction {
            numerator,
            denominator: Vec::new(),
        }
    }

    pub(super) fn constant(value: Rational) -> Fraction {
        Fraction::polynomial(Poly::constant(value))
    }

    pub(super) fn monomial(monomial: Monomial) -> Fraction {
        Fraction::polynomial(Poly::term(monomial, Rational::ONE))
    }

    pub(crate) fn is_zero(&self) -> bool {
        self.numerator.is_zero()
    }

    /// The value, if it is a number.
    pub(crate) fn as_constant(&self) -> Option<Rational> {
        if self.denominator.is_empty() {
            self.numerator.as_constant()
        } else {
            None
        }
    }

    pub(super) fn scaled(&self, factor: &Rational) -> Fraction {
        if factor.is_zero() {
            return Fraction::constant(Rational::ZERO);
        }
        Fraction {
            numerator: self.numerator.scaled(factor),
            denominator: self.denominator.clone(),
        }
    }

    pub(super) fn negated(&self) -> Fraction {
        self.scaled(&Rational::from(-1))
    }
}

/// The multiplicity of a factor in a denominator.
pub(super) fn multiplicity(denominator: &Denominator, factor: &Poly) -> u32 {
    denominator
        .iter()
        .find(|(f, _)| **f == *factor)
        .map_or(0, |(_, m)| *m)
}

/// Multiplies a factor into a denominator.
pub(super) fn insert(denominator: &mut Denominator, factor: Rc<Poly>, times: u32) {
    if times == 0 {
        return;
    }
    match denominator.iter_mut().find(|(f, _)| *f == factor) {
        Some((_, m)) => *m += times,
        None => {
            denominator.push((factor, times));
            denominator.sort();
        }
    }
}
