//! Exponentials of sums, of logarithms and of imaginary arguments.

use super::super::function::Function;
use super::super::node::{Expr, Node, Rational};
use super::exponent::Exponent;
use super::fraction::Fraction;
use super::poly::{Monomial, Poly};
use super::{Mode, Normalizer, Rule};

/// Multiples of an inverse trigonometric function that are expanded.
const MAX_MULTIPLE: i64 = 16;

impl Normalizer<'_> {
    /// `exp(argument)`: the product over the terms of the argument.
    pub(super) fn exponential(&self, argument: &Fraction) -> Option<Fraction> {
        let mut result = Fraction::polynomial(Poly::one());
        let multiplied = match self.mode {
            Mode::Proof if !argument.denominator.is_empty() => self.multiplied_out(argument),
            _ => None,
        };
        let argument = multiplied.as_ref().unwrap_or(argument);
        for (monomial, coefficient) in &argument.numerator.0 {
            let exponent = Exponent::from_rational(coefficient)?;
            let factor = if argument.denominator.is_empty() {
                self.exponential_of_term(monomial, exponent)?
            } else {
                let numerator = Poly::term(monomial.clone(), Rational::ONE);
                let one = Fraction {
                    numerator,
                    denominator: argument.denominator.clone(),
                };
                self.plain_exponential(self.formula(&one), exponent)?
            };
            result = self.multiply(&result, &factor)?;
        }
        Some(result)
    }

    fn plain_exponential(&self, argument: Expr, exponent: Exponent) -> Option<Fraction> {
        self.kernel_power(self.pool.exp(argument), exponent)
    }

    /// `exp(monomial)^exponent`.
    fn exponential_of_term(&self, monomial: &Monomial, exponent: Exponent) -> Option<Fraction> {
        let argument = self.monomial_formula(monomial);
        match &monomial.0[..] {
            [(kernel, power)] if *power == Exponent::ONE => {
                if let Node::Call(Function::Log, inner) = &*self.pool.node(*kernel) {
                    return self.power(inner[0], &exponent.to_rational());
                }
            }
            [_, _] if self.is_complex(argument) => return self.rotation(monomial, exponent),
            _ => {}
        }
        self.plain_exponential(argument, exponent)
    }

    /// `exp(i*angle)^exponent` for an angle that is a single kernel.
    fn rotation(&self, monomial: &Monomial, exponent: Exponent) -> Option<Fraction> {
        let imaginary = self.imaginary();
        let argument = self.monomial_formula(monomial);
        let rest = monomial.without(imaginary);
        let angle = match &rest.0[..] {
            [(kernel, power)] if *power == Exponent::ONE => *kernel,
            _ => return self.plain_exponential(argument, exponent),
        };
        let (count, rest) = exponent.divided_by(Exponent::ONE)?;
        match &*self.pool.node(angle) {
            Node::Pi => self.half_turns(exponent),
            Node::Call(function @ (Function::Asin | Function::Atan), inner)
                if count.abs() <= MAX_MULTIPLE =>
            {
                let turn = self.inverse_rotation(*function, inner[0])?;
                let whole = self.whole_power(&turn, count)?;
                if rest.is_zero() {
                    return Some(whole);
                }
                let kernel = self.pool.exp(argument);
                if turn.denominator.is_empty() {
                    self.register(kernel, Rule::new(1, turn.numerator));
                }
                self.multiply(&whole, &Fraction::monomial(Monomial::of(kernel, rest)))
            }
            _ => self.plain_exponential(argument, exponent),
        }
    }

    /// `exp(i*asin(z)) = sqrt(1 - z^2) + i*z`, `exp(i*atan(z)) = (1 + i*z)/sqrt(1 + z^2)`.
    fn inverse_rotation(&self, function: Function, z: Expr) -> Option<Fraction> {
        let pool = self.pool;
        let square = pool.square(z);
        let (radicand, minus_half) = (
            if function == Function::Asin {
                pool.sub(pool.one(), square)
            } else {
                pool.add(pool.one(), square)
            },
            Rational::from_parts((-1).into(), 2u8.into()),
        );
        let i_z = self.multiply(&self.kernel(self.imaginary()), &self.normal(z))?;
        if function == Function::Asin {
            return self.add(&self.power(radicand, &-minus_half)?, &i_z);
        }
        let top = self.add(&Fraction::polynomial(Poly::one()), &i_z)?;
        self.multiply(&top, &self.power(radicand, &minus_half)?)
    }
}
