//! Sums, products and whole powers of normal forms, with cancellation.

use std::rc::Rc;

use super::super::limit::Limit;
use super::super::node::Rational;
use super::Normalizer;
use super::exponent::Exponent;
use super::fraction::{Denominator, Fraction, insert, multiplicity};
use super::poly::{Monomial, Poly};

/// A whole power of a sum may have about this many terms; beyond it the power stays a kernel.
const MAX_POWER_TERMS: usize = 1_500;

/// A denominator may have this many factors.
const MAX_FACTORS: usize = 24;

/// The largest whole power that is multiplied out.
const MAX_POWER: i64 = 64;

impl Normalizer<'_> {
    pub(super) fn add(&self, a: &Fraction, b: &Fraction) -> Option<Fraction> {
        let mut denominator = a.denominator.clone();
        for (factor, times) in &b.denominator {
            let present = multiplicity(&denominator, factor);
            insert(
                &mut denominator,
                factor.clone(),
                times.saturating_sub(present),
            );
        }
        if denominator.len() > MAX_FACTORS {
            return None;
        }
        let mut numerator = self.lifted(a, &denominator)?;
        numerator.add_assign(&self.lifted(b, &denominator)?);
        self.cancel(numerator, denominator)
    }

    /// The numerator over a larger denominator.
    fn lifted(&self, a: &Fraction, denominator: &Denominator) -> Option<Poly> {
        let mut numerator = a.numerator.clone();
        for (factor, times) in denominator {
            for _ in multiplicity(&a.denominator, factor)..*times {
                numerator = self.poly_product(&numerator, factor)?;
            }
        }
        Some(numerator)
    }

    /// A product of polynomials, reduced.
    pub(super) fn poly_product(&self, a: &Poly, b: &Poly) -> Option<Poly> {
        if !self.pool.may_spend(a.product_cost(b)) {
            return None;
        }
        self.reduce(a.raw_product(b, self.pool)?)
    }

    pub(super) fn multiply(&self, a: &Fraction, b: &Fraction) -> Option<Fraction> {
        if a.denominator.is_empty() && b.denominator.is_empty() {
            return Some(Fraction::polynomial(
                self.poly_product(&a.numerator, &b.numerator)?,
            ));
        }
        if a.denominator.len() + b.denominator.len() > MAX_FACTORS {
            return None;
        }
        // Each fraction is reduced already: only numerators and denominators across can cancel.
        let left = self.cancel(a.numerator.clone(), b.denominator.clone())?;
        let right = self.cancel(b.numerator.clone(), a.denominator.clone())?;
        let numerator = self.poly_product(&left.numerator, &right.numerator)?;
        let (mut denominator, other) = (left.denominator, right.denominator);
        let mut share = false;
        for (factor, times) in other {
            share |= denominator
                .iter()
                .any(|(f, _)| *f != factor && f.gcd(&factor, self.pool).is_some());
            insert(&mut denominator, factor, times);
        }
        if share {
            return self.cancel(numerator, denominator);
        }
        Some(Fraction {
            numerator,
            denominator,
        })
    }

    /// The inverse; none for zero.
    pub(super) fn inverse(&self, a: &Fraction) -> Option<Fraction> {
        let (coefficient, monomial, factor) = self.factored(&a.numerator)?;
        let mut numerator = Poly::constant(Rational::ONE / coefficient);
        for (f, times) in &a.denominator {
            for _ in 0..*times {
                numerator = self.poly_product(&numerator, f)?;
            }
        }
        let mut denominator = Denominator::new();
        if !factor.is_one() {
            insert(&mut denominator, Rc::new(factor), 1);
        }
        let quotient = self.cancel(numerator, denominator)?;
        self.multiply(
            &quotient,
            &self.monomial_power(&monomial, Exponent::whole(-1))?,
        )
    }

    /// A polynomial as number, monomial and a factor fit for a denominator; none for zero, and
    /// where the common denominator of its numbers is over budget.
    pub(super) fn factored(&self, a: &Poly) -> Option<(Rational, Monomial, Poly)> {
        if a.is_zero() {
            return None;
        }
        let monomial = a.common_monomial();
        let bare = a.times_monomial(&monomial.inverse()?)?;
        let mut coefficient = bare.positive_content(self.pool)?;
        if bare.leading_coefficient() < Rational::ZERO {
            coefficient = -coefficient;
        }
        let factor = bare.scaled(&(Rational::ONE / &coefficient));
        Some((coefficient, monomial, factor))
    }

    /// A whole power, multiplied out within the budget.
    pub(super) fn whole_power(&self, a: &Fraction, n: i64) -> Option<Fraction> {
        if n < 0 {
            return self.inverse(&self.whole_power(a, n.checked_neg()?)?);
        }
        if let (Some((monomial, coefficient)), true) =
            (a.numerator.as_term(), a.denominator.is_empty())
        {
            let number = super::super::power::exact_power(coefficient, &Rational::from(n))?;
            return Some(
                self.monomial_power(monomial, Exponent::whole(n))?
                    .scaled(&number),
            );
        }
        if n > MAX_POWER || power_terms(a.numerator.0.len(), n) > MAX_POWER_TERMS {
            self.pool.exceed(Limit::Product);
            return None;
        }
        let mut numerator = Poly::one();
        for _ in 0..n {
            numerator = self.poly_product(&numerator, &a.numerator)?;
        }
        let times = u32::try_from(n).ok()?;
        let scaled = a
            .denominator
            .iter()
            .map(|(f, m)| Some((f.clone(), m.checked_mul(times)?)));
        let denominator = if n == 0 {
            Denominator::new()
        } else {
            scaled.collect::<Option<_>>()?
        };
        Some(Fraction {
            numerator,
            denominator,
        })
    }

    /// The quotient with common factors removed, as far as the budget goes.
    fn cancel(&self, mut numerator: Poly, denominator: Denominator) -> Option<Fraction> {
        let mut pending = denominator;
        let mut kept = Denominator::new();
        while let Some((factor, mut times)) = pending.pop() {
            if numerator.is_zero() {
                return Some(Fraction::polynomial(numerator));
            }
            while times > 0
                && let Some(quotient) = numerator.exact_quotient(&factor, self.pool)
            {
                numerator = quotient;
                times -= 1;
            }
            if times == 0 {
                continue;
            }
            match self.common_part(&numerator, &kept, &factor) {
                Some((number, part, rest)) => {
                    let power = isize::try_from(times).ok()?;
                    numerator = numerator.scaled(&(Rational::ONE / number.pow(power)));
                    insert(&mut pending, Rc::new(part), times);
                    insert(&mut pending, Rc::new(rest), times);
                    // A factor found in what was kept has to be split there too.
                    pending.append(&mut kept);
                    merge(&mut pending);
                }
                None => insert(&mut kept, factor, times),
            }
        }
        Some(Fraction {
            numerator,
            denominator: kept,
        })
    }

    /// A factor as a number, which is 1 or -1, times two parts, of which the first also divides the
    /// numerator or a factor kept.
    fn common_part(
        &self,
        numerator: &Poly,
        kept: &Denominator,
        factor: &Poly,
    ) -> Option<(Rational, Poly, Poly)> {
        let others = std::iter::once(numerator).chain(kept.iter().map(|(f, _)| &**f));
        others.filter(|other| *other != factor).find_map(|other| {
            let common = factor.gcd(other, self.pool)?;
            let rest = factor.exact_quotient(&common, self.pool)?;
            // Each part has a positive last coefficient then, their product need not have one.
            let (number, left, common) = self.factored(&common)?;
            let (other, right, rest) = self.factored(&rest)?;
            let split = left.is_one() && right.is_one() && !common.is_one() && !rest.is_one();
            split.then_some((number * other, common, rest))
        })
    }
}

/// Adds up multiplicities of equal factors.
fn merge(denominator: &mut Denominator) {
    let mut merged = Denominator::new();
    for (factor, times) in denominator.drain(..) {
        insert(&mut merged, factor, times);
    }
    *denominator = merged;
}

/// The number of terms of the n-th power of a general sum of that many terms, capped.
fn power_terms(terms: usize, n: i64) -> usize {
    let mut count: usize = 1;
    for i in 1..terms as u64 {
        count = count.saturating_mul((n as u64 + i) as usize) / i as usize;
        if count > MAX_POWER_TERMS {
            break;
        }
    }
    count
}
