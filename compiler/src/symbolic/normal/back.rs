//! From a normal form back to a formula.

use std::rc::Rc;

use super::super::function::Function;
use super::super::node::{Expr, Node, Rational};
use super::fraction::Fraction;
use super::poly::{Monomial, Poly};
use super::{Mode, Normalizer};

impl Normalizer<'_> {
    /// The fraction as a formula: expanded numerator over the factors of the denominator.
    pub(super) fn formula(&self, fraction: &Fraction) -> Expr {
        let (numerator, below) = self.oriented(fraction);
        self.pool.mul(self.poly_formula(&numerator), below)
    }

    /// The fraction as the argument of a function: for proofs with its denominator multiplied out, so
    /// that equal fractions are one formula.
    pub(super) fn argument(&self, fraction: &Fraction) -> Expr {
        let single = |(_, times): &(_, u32)| *times == 1;
        if self.mode == Mode::Light
            || (fraction.denominator.len() < 2 && fraction.denominator.iter().all(single))
        {
            return self.formula(fraction);
        }
        let multiplied = self.multiplied_out(fraction);
        self.formula(multiplied.as_ref().unwrap_or(fraction))
    }

    /// The fraction with one factor in its denominator.
    pub(super) fn multiplied_out(&self, fraction: &Fraction) -> Option<Fraction> {
        let mut product = Poly::one();
        for (factor, times) in &fraction.denominator {
            for _ in 0..*times {
                product = self.poly_product(&product, factor)?;
            }
        }
        let (coefficient, monomial, factor) = self.factored(&product)?;
        let numerator = fraction.numerator.times_monomial(&monomial.inverse()?)?;
        Some(Fraction {
            numerator: numerator.scaled(&(Rational::ONE / coefficient)),
            denominator: vec![(Rc::new(factor), 1)],
        })
    }

    /// The numerator, and the inverse of the denominator as a formula: each factor with a positive
    /// first term, for which the sign of the numerator makes up.
    pub(super) fn oriented(&self, fraction: &Fraction) -> (Poly, Expr) {
        let mut negative = false;
        let factors = fraction.denominator.iter().map(|(factor, times)| {
            let base = self.poly_formula(factor);
            let turned = self.leads_negative(base);
            negative ^= turned && times % 2 == 1;
            let base = if turned {
                self.poly_formula(&factor.negated())
            } else {
                base
            };
            self.pool.pow(base, self.pool.int(-i64::from(*times)))
        });
        let below = self.pool.product(factors.collect::<Vec<_>>());
        let numerator = if negative {
            fraction.numerator.negated()
        } else {
            fraction.numerator.clone()
        };
        (numerator, below)
    }

    /// Whether the first term in structural order has a negative coefficient.
    pub(super) fn leads_negative(&self, e: Expr) -> bool {
        let number = |e| self.pool.as_number(e).is_some_and(|n| n < Rational::ZERO);
        match &*self.pool.node(e) {
            Node::Sum(terms) => self.leads_negative(terms[0]),
            Node::Product(factors) => {
                number(factors[0]) || factors.iter().any(|&f| self.is_negative_sum(f))
            }
            _ => number(e),
        }
    }

    fn is_negative_sum(&self, e: Expr) -> bool {
        matches!(&*self.pool.node(e), Node::Sum(terms) if self.leads_negative(terms[0]))
    }

    pub(super) fn poly_formula(&self, poly: &Poly) -> Expr {
        self.pool.sum(
            poly.0
                .iter()
                .map(|(monomial, coefficient)| self.term_formula(monomial, coefficient)),
        )
    }

    fn term_formula(&self, monomial: &Monomial, coefficient: &Rational) -> Expr {
        self.pool.mul(
            self.pool.number(coefficient.clone()),
            self.monomial_formula(monomial),
        )
    }

    /// A product of powers; exponentials are put together.
    pub(super) fn monomial_formula(&self, monomial: &Monomial) -> Expr {
        let pool = self.pool;
        let mut exponents = Vec::new();
        let mut factors = Vec::new();
        for &(kernel, e) in &monomial.0 {
            let e = pool.number(e.to_rational());
            match &*pool.node(kernel) {
                Node::Call(Function::Exp, argument) => match self.power_of_base(argument[0]) {
                    Some((base, exponent)) => factors.push(pool.pow(base, pool.mul(exponent, e))),
                    None => exponents.push(pool.mul(argument[0], e)),
                },
                _ => factors.push(pool.pow(kernel, e)),
            }
        }
        factors.push(pool.exp(pool.sum(exponents)));
        pool.product(factors)
    }

    /// `p*log(b)` as base and exponent of `b^p`.
    fn power_of_base(&self, argument: Expr) -> Option<(Expr, Expr)> {
        let pool = self.pool;
        let Node::Product(factors) = &*pool.node(argument) else {
            return None;
        };
        let (position, base) =
            factors
                .iter()
                .enumerate()
                .find_map(|(i, &f)| match &*pool.node(f) {
                    Node::Call(Function::Log, inner) => Some((i, inner[0])),
                    _ => None,
                })?;
        let others = factors
            .iter()
            .enumerate()
            .filter(|&(i, _)| i != position)
            .map(|(_, &f)| f);
        Some((base, pool.product(others)))
    }
}
