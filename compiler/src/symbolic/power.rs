//! Powers: numbers are folded, and taken apart is only what holds for every sign.

use dashu_base::{Abs, BitTest, UnsignedAbs};
use dashu_int::{IBig, UBig};

use super::node::{Expr, Node, Rational};
use super::pool::Pool;

/// A power of two numbers is folded up to this many bits, about 300 digits above or below the bar: what
/// does not fit a double precision number is easier to read as the power it was written as.
const MAX_FOLDED_BITS: usize = 1_000;

/// Powers of numbers inside a normal form are worked out up to this many bits.
const MAX_BITS: u64 = 20_000;

impl Pool {
    /// `base^exponent`. A power of a power or of a product is taken apart only where that holds for
    /// every sign: for whole exponents.
    pub fn pow(&self, base: Expr, exponent: Expr) -> Expr {
        let Some(n) = self.as_number(exponent) else {
            return self.symbolic_power(base, exponent);
        };
        if n.is_zero() {
            return self.one();
        }
        if n.is_one() {
            return base;
        }
        match &*self.node(base) {
            Node::Number(value) => self.numeric_power(value, &n),
            Node::Power(inner, first) if n.is_int() => self.pow(*inner, self.mul(*first, exponent)),
            Node::Product(factors) if n.is_int() => {
                self.product(factors.iter().map(|&f| self.pow(f, exponent)))
            }
            Node::Product(factors) => self.root_of_product(base, factors, exponent, &n),
            Node::Call(super::Function::Exp, arguments) => {
                self.exp(self.mul(arguments[0], exponent))
            }
            _ => self.intern(Node::Power(base, exponent)),
        }
    }

    fn symbolic_power(&self, base: Expr, exponent: Expr) -> Expr {
        if self.is_one_literal(base) {
            return base;
        }
        if let Node::Call(super::Function::Exp, arguments) = &*self.node(base) {
            return self.exp(self.mul(arguments[0], exponent));
        }
        self.intern(Node::Power(base, exponent))
    }

    /// `(c*rest)^n` for a positive number c and a broken exponent: c^n comes out where it is a number.
    fn root_of_product(&self, base: Expr, factors: &[Expr], exponent: Expr, n: &Rational) -> Expr {
        if let Some(c) = self.as_number(factors[0])
            && c > Rational::ZERO
        {
            let root = self.numeric_power(&c, n);
            if let Some(root) = self.as_number(root) {
                let rest = self.intern(Node::Power(self.without_coefficient(factors), exponent));
                return self.finish_product(root, vec![rest]);
            }
        }
        self.intern(Node::Power(base, exponent))
    }

    /// A power of two numbers, folded where the result is a number of reasonable size.
    fn numeric_power(&self, base: &Rational, exponent: &Rational) -> Expr {
        let inverse = exponent.is_int() && *exponent == -Rational::ONE;
        let folded = exact_power(base, exponent).filter(|value| {
            // An inverse is no larger than what it inverts, and a quotient of numbers is a number.
            inverse
                || value
                    .numerator()
                    .bit_len()
                    .max(value.denominator().bit_len())
                    <= MAX_FOLDED_BITS
        });
        folded.map_or_else(
            || {
                let (base, exponent) = (self.number(base.clone()), self.number(exponent.clone()));
                self.intern(Node::Power(base, exponent))
            },
            |value| self.number(value),
        )
    }
}

/// `base^exponent` if that is a rational number of reasonable size.
pub(super) fn exact_power(base: &Rational, exponent: &Rational) -> Option<Rational> {
    if base.is_zero() {
        return (*exponent > Rational::ZERO).then_some(Rational::ZERO);
    }
    if base.is_one() {
        return Some(Rational::ONE);
    }
    let root: usize = exponent.denominator().try_into().ok()?;
    let power: isize = exponent.numerator().try_into().ok()?;
    let bits = base.numerator().bit_len().max(base.denominator().bit_len()) as u64;
    if (power.unsigned_abs() as u64).checked_mul(bits)? > MAX_BITS * root.min(64) as u64 {
        return None;
    }
    let base = if root == 1 {
        base.clone()
    } else {
        if *base < Rational::ZERO {
            return None;
        }
        let numerator = exact_root(&base.numerator().unsigned_abs(), root)?;
        let denominator = exact_root(base.denominator(), root)?;
        Rational::from_parts(numerator.into(), denominator)
    };
    Some(base.pow(power))
}

/// The whole number r with r^root = value, if there is one.
pub(super) fn exact_root(value: &UBig, root: usize) -> Option<UBig> {
    let candidate = value.nth_root(root);
    (candidate.pow(root) == *value).then_some(candidate)
}

/// The real cube root of a number, if it is a rational number.
pub(super) fn exact_cube_root(value: &Rational) -> Option<Rational> {
    let numerator = exact_root(&value.numerator().unsigned_abs(), 3)?;
    let denominator = exact_root(value.denominator(), 3)?;
    let root = Rational::from_parts(IBig::from(numerator), denominator);
    Some(if value.clone().abs() == *value {
        root
    } else {
        -root
    })
}
