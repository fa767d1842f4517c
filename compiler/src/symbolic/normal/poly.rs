//! Sparse polynomials with exact rational coefficients and rational exponents over kernels.

use std::collections::BTreeMap;

use dashu_base::{BitTest, Gcd, UnsignedAbs};
use dashu_int::{IBig, UBig};

use super::super::limit::Limit;
use super::super::node::{Expr, Rational};
use super::super::pool::Pool;
use super::exponent::Exponent;

/// A product of kernels: each with its exponent, which is not zero, sorted by kernel.
#[derive(Clone, PartialEq, Eq, Hash, PartialOrd, Ord, Debug, Default)]
pub(crate) struct Monomial(pub(super) Vec<(Expr, Exponent)>);

impl Monomial {
    pub(super) fn one() -> Monomial {
        Monomial::default()
    }

    pub(super) fn of(kernel: Expr, exponent: Exponent) -> Monomial {
        if exponent.is_zero() {
            Monomial::one()
        } else {
            Monomial(vec![(kernel, exponent)])
        }
    }

    pub(super) fn is_one(&self) -> bool {
        self.0.is_empty()
    }

    pub(super) fn exponent(&self, kernel: Expr) -> Exponent {
        self.0
            .iter()
            .find(|(k, _)| *k == kernel)
            .map_or(Exponent::ZERO, |(_, e)| *e)
    }

    /// The monomial without one kernel.
    pub(super) fn without(&self, kernel: Expr) -> Monomial {
        Monomial(
            self.0
                .iter()
                .copied()
                .filter(|(k, _)| *k != kernel)
                .collect(),
        )
    }

    pub(super) fn times(&self, other: &Monomial) -> Option<Monomial> {
        let mut result = Vec::with_capacity(self.0.len() + other.0.len());
        let (mut i, mut j) = (0, 0);
        while i < self.0.len() && j < other.0.len() {
            let ((a, e), (b, f)) = (self.0[i], other.0[j]);
            if a == b {
                let sum = e.plus(f)?;
                if !sum.is_zero() {
                    result.push((a, sum));
                }
                (i, j) = (i + 1, j + 1);
            } else if a < b {
                result.push((a, e));
                i += 1;
            } else {
                result.push((b, f));
                j += 1;
            }
        }
        result.extend_from_slice(&self.0[i..]);
        result.extend_from_slice(&other.0[j..]);
        Some(Monomial(result))
    }

    pub(super) fn raised(&self, exponent: Exponent) -> Option<Monomial> {
        if exponent.is_zero() {
            return Some(Monomial::one());
        }
        self.0
            .iter()
            .map(|&(k, e)| Some((k, e.times(exponent)?)))
            .collect::<Option<_>>()
            .map(Monomial)
    }

    pub(super) fn inverse(&self) -> Option<Monomial> {
        self.raised(Exponent::whole(-1))
    }
}

/// A polynomial: each monomial with its coefficient, which is not zero.
#[derive(Clone, PartialEq, Eq, Hash, PartialOrd, Ord, Debug, Default)]
pub(crate) struct Poly(pub(super) BTreeMap<Monomial, Rational>);

impl Poly {
    pub(super) fn zero() -> Poly {
        Poly::default()
    }

    pub(super) fn one() -> Poly {
        Poly::constant(Rational::ONE)
    }

    pub(super) fn constant(value: Rational) -> Poly {
        Poly::term(Monomial::one(), value)
    }

    pub(super) fn term(monomial: Monomial, coefficient: Rational) -> Poly {
        let mut terms = BTreeMap::new();
        if !coefficient.is_zero() {
            terms.insert(monomial, coefficient);
        }
        Poly(terms)
    }

    pub(super) fn is_zero(&self) -> bool {
        self.0.is_empty()
    }

    /// The value, if there is no kernel in it.
    pub(super) fn as_constant(&self) -> Option<Rational> {
        match self.as_term() {
            None if self.is_zero() => Some(Rational::ZERO),
            Some((monomial, value)) if monomial.is_one() => Some(value.clone()),
            _ => None,
        }
    }

    pub(super) fn is_one(&self) -> bool {
        self.as_constant().is_some_and(|value| value.is_one())
    }

    /// The only term, if there is just one.
    pub(super) fn as_term(&self) -> Option<(&Monomial, &Rational)> {
        if self.0.len() == 1 {
            self.0.iter().next()
        } else {
            None
        }
    }

    pub(super) fn add_term(&mut self, monomial: Monomial, coefficient: Rational) {
        use std::collections::btree_map::Entry;
        match self.0.entry(monomial) {
            Entry::Vacant(entry) => {
                if !coefficient.is_zero() {
                    entry.insert(coefficient);
                }
            }
            Entry::Occupied(mut entry) => {
                let sum = std::mem::take(entry.get_mut()) + coefficient;
                if sum.is_zero() {
                    entry.remove();
                } else {
                    *entry.get_mut() = sum;
                }
            }
        }
    }

    pub(super) fn add_assign(&mut self, other: &Poly) {
        for (monomial, coefficient) in &other.0 {
            self.add_term(monomial.clone(), coefficient.clone());
        }
    }

    pub(super) fn scaled(&self, factor: &Rational) -> Poly {
        if factor.is_zero() {
            return Poly::zero();
        }
        Poly(
            self.0
                .iter()
                .map(|(m, c)| (m.clone(), c * factor))
                .collect(),
        )
    }

    pub(super) fn negated(&self) -> Poly {
        self.scaled(&Rational::from(-1))
    }

    /// The product, not yet reduced; none if it is over budget.
    pub(super) fn raw_product(&self, other: &Poly, pool: &Pool) -> Option<Poly> {
        if self.0.len().saturating_mul(other.0.len()) as u64 > Limit::Product.amount() {
            pool.exceed(Limit::Product);
            return None;
        }
        let mut result = Poly::zero();
        for (m, c) in &self.0 {
            for (n, d) in &other.0 {
                result.add_term(m.times(n)?, c * d);
            }
        }
        Some(result)
    }

    pub(super) fn times_monomial(&self, monomial: &Monomial) -> Option<Poly> {
        self.0
            .iter()
            .map(|(m, c)| Some((m.times(monomial)?, c.clone())))
            .collect::<Option<_>>()
            .map(Poly)
    }

    /// The largest monomial that divides every term: the least exponent of each kernel, 0 where it is
    /// missing from a term.
    pub(super) fn common_monomial(&self) -> Monomial {
        let mut counts: BTreeMap<Expr, (usize, Exponent)> = BTreeMap::new();
        for monomial in self.0.keys() {
            for &(kernel, exponent) in &monomial.0 {
                let entry = counts.entry(kernel).or_insert((0, exponent));
                entry.0 += 1;
                entry.1 = entry.1.min(exponent);
            }
        }
        let least = |(count, exponent): (usize, Exponent)| {
            if count == self.0.len() {
                exponent
            } else {
                exponent.min(Exponent::ZERO)
            }
        };
        let list = counts.into_iter().map(|(k, entry)| (k, least(entry)));
        Monomial(list.filter(|(_, e)| !e.is_zero()).collect())
    }

    /// Term operations that a product with another polynomial takes: kernels that are read.
    pub(super) fn product_cost(&self, other: &Poly) -> u64 {
        let terms = |p: &Poly| p.0.len() as u64;
        let kernels = |p: &Poly| p.0.keys().map(|m| m.0.len() as u64 + 1).sum::<u64>();
        terms(self) * kernels(other) + terms(other) * kernels(self)
    }

    /// The positive number whose removal leaves coprime whole coefficients; none where their common
    /// denominator is over budget.
    pub(super) fn positive_content(&self, pool: &Pool) -> Option<Rational> {
        let mut numerator: Option<UBig> = None;
        let mut denominator = UBig::ONE;
        for coefficient in self.0.values() {
            let top = coefficient.numerator().unsigned_abs();
            numerator = Some(match numerator {
                None => top,
                Some(known) => known.gcd(top),
            });
            let bottom = coefficient.denominator();
            denominator = &denominator / (&denominator).gcd(bottom) * bottom;
            if denominator.bit_len() as u64 > Limit::Denominator.amount() {
                pool.exceed(Limit::Denominator);
                return None;
            }
        }
        Some(numerator.map_or(Rational::ONE, |top| {
            Rational::from_parts(IBig::from(top), denominator)
        }))
    }

    /// The coefficient of the last monomial.
    pub(super) fn leading_coefficient(&self) -> Rational {
        self.0
            .last_key_value()
            .map_or(Rational::ZERO, |(_, c)| c.clone())
    }
}
