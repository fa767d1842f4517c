//! Exponents of a normal form: rational numbers in machine words.

use std::cmp::Ordering;

use super::super::node::Rational;

/// A reduced fraction with positive denominator. Arithmetic that would overflow gives none, which
/// ends the normal form as over budget.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub(crate) struct Exponent {
    numerator: i64,
    denominator: i64,
}

impl Exponent {
    pub(super) const ZERO: Exponent = Exponent {
        numerator: 0,
        denominator: 1,
    };
    pub(super) const ONE: Exponent = Exponent {
        numerator: 1,
        denominator: 1,
    };

    pub(super) fn whole(value: i64) -> Exponent {
        Exponent {
            numerator: value,
            denominator: 1,
        }
    }

    pub(super) fn from_rational(value: &Rational) -> Option<Exponent> {
        let numerator = value.numerator().try_into().ok()?;
        let denominator = value.denominator().try_into().ok()?;
        Some(Exponent {
            numerator,
            denominator,
        })
    }

    pub(super) fn to_rational(self) -> Rational {
        Rational::from_parts_signed(self.numerator.into(), self.denominator.into())
    }

    fn reduced(numerator: i128, denominator: i128) -> Option<Exponent> {
        let divisor = gcd(numerator.unsigned_abs(), denominator.unsigned_abs()).max(1) as i128;
        Some(Exponent {
            numerator: (numerator / divisor).try_into().ok()?,
            denominator: (denominator / divisor).try_into().ok()?,
        })
    }

    pub(super) fn plus(self, other: Exponent) -> Option<Exponent> {
        if self.denominator == 1 && other.denominator == 1 {
            return Some(Exponent::whole(
                self.numerator.checked_add(other.numerator)?,
            ));
        }
        let (a, b) = (i128::from(self.denominator), i128::from(other.denominator));
        let sum = i128::from(self.numerator) * b + i128::from(other.numerator) * a;
        Exponent::reduced(sum, a * b)
    }

    pub(super) fn times(self, other: Exponent) -> Option<Exponent> {
        Exponent::reduced(
            i128::from(self.numerator) * i128::from(other.numerator),
            i128::from(self.denominator) * i128::from(other.denominator),
        )
    }

    pub(super) fn minus(self, other: Exponent) -> Option<Exponent> {
        self.plus(other.negated()?)
    }

    pub(super) fn negated(self) -> Option<Exponent> {
        Some(Exponent {
            numerator: self.numerator.checked_neg()?,
            denominator: self.denominator,
        })
    }

    /// One over it; none for zero.
    pub(super) fn inverse(self) -> Option<Exponent> {
        Exponent::reduced(
            i128::from(self.denominator) * i128::from(self.numerator.signum()),
            i128::from(self.numerator.unsigned_abs()),
        )
        .filter(|_| self.numerator != 0)
    }

    pub(super) fn is_zero(self) -> bool {
        self.numerator == 0
    }

    pub(super) fn is_negative(self) -> bool {
        self.numerator < 0
    }

    pub(super) fn as_whole(self) -> Option<i64> {
        (self.denominator == 1).then_some(self.numerator)
    }

    pub(super) fn denominator(self) -> i64 {
        self.denominator
    }

    /// How often `modulus` goes into it, rounded down, and what is left.
    pub(super) fn divided_by(self, modulus: Exponent) -> Option<(i64, Exponent)> {
        let top = i128::from(self.numerator) * i128::from(modulus.denominator);
        let bottom = i128::from(self.denominator) * i128::from(modulus.numerator);
        let count: i64 = top.div_euclid(bottom).try_into().ok()?;
        let taken = Exponent::whole(count).times(modulus)?;
        Some((count, self.minus(taken)?))
    }
}

impl Ord for Exponent {
    fn cmp(&self, other: &Self) -> Ordering {
        let left = i128::from(self.numerator) * i128::from(other.denominator);
        left.cmp(&(i128::from(other.numerator) * i128::from(self.denominator)))
    }
}

impl PartialOrd for Exponent {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

pub(super) fn gcd(mut a: u128, mut b: u128) -> u128 {
    while b != 0 {
        (a, b) = (b, a % b);
    }
    a
}
