//! Logarithms of products and powers.

use super::super::function::Function;
use super::super::node::{Expr, Node, Rational};
use super::exponent::Exponent;
use super::fraction::Fraction;
use super::poly::Poly;
use super::powers::prime_powers;
use super::split::Base;
use super::{Mode, Normalizer};

impl Normalizer<'_> {
    /// `log(e)`, split over factors that must be positive for it to have a value.
    pub(super) fn log(&self, e: Expr) -> Option<Fraction> {
        let parts = self.by_sign(self.split(e)?)?;
        let mut terms = vec![self.log_of_number(&parts.coefficient)?];
        for (base, exponent) in &parts.positive {
            terms.push(self.log_of_base(base)?.scaled(&exponent.to_rational()));
        }
        for (base, exponent) in &parts.even {
            terms.push(self.log_of_even(base, *exponent)?);
        }
        if let Some(mixed) = &parts.mixed {
            terms.push(self.log_kernel(self.poly_formula(mixed)));
        }
        terms
            .iter()
            .try_fold(Fraction::polynomial(Poly::zero()), |sum, term| {
                self.add(&sum, term)
            })
    }

    /// The logarithm of a number's size.
    fn log_of_number(&self, value: &Rational) -> Option<Fraction> {
        let mut result = Fraction::polynomial(Poly::zero());
        for (prime, count) in prime_powers(value) {
            let log = self.log_kernel(self.pool.number(Rational::from(prime)));
            result = self.add(&result, &log.scaled(&Rational::from(count)))?;
        }
        Some(result)
    }

    fn log_of_base(&self, base: &Base) -> Option<Fraction> {
        match base {
            Base::Kernel(kernel) => match &*self.pool.node(*kernel) {
                Node::Call(Function::Exp, argument) => Some((*self.normal(argument[0])).clone()),
                _ => Some(self.log_kernel(*kernel)),
            },
            Base::Sum(poly) => Some(self.log_kernel(self.poly_formula(poly))),
        }
    }

    /// `log(base^exponent)` for an even exponent and a base of unknown sign.
    fn log_of_even(&self, base: &Base, exponent: Exponent) -> Option<Fraction> {
        if self.mode == Mode::Proof {
            let size = self.size_kernel(base)?;
            return Some(self.log_kernel(size).scaled(&exponent.to_rational()));
        }
        let square = self.pool.square(self.poly_formula(&self.base_poly(base)));
        let half = exponent.to_rational() / Rational::from(2);
        Some(self.log_kernel(square).scaled(&half))
    }

    fn log_kernel(&self, argument: Expr) -> Fraction {
        self.kernel(self.pool.log(argument))
    }
}
