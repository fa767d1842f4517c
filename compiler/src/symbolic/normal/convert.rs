//! Division and greatest common divisors of polynomials over kernels.
//!
//! Exponents become whole by taking a root of a kernel as the variable, and not negative by taking
//! out a monomial.

use std::collections::{BTreeMap, BTreeSet};

use dashu_int::IBig;

use super::super::node::{Expr, Rational};
use super::super::pool::Pool;
use super::exponent::{self, Exponent};
use super::integer_poly::{Budget, IntegerPoly};
use super::poly::{Monomial, Poly};

/// The largest exponent of a variable after roots have been made whole.
const MAX_DEGREE: i64 = 10_000;

/// The kernels of some polynomials as variables: variable i is `kernel^(1/roots[i])`.
pub(super) struct Variables {
    kernels: Vec<Expr>,
    roots: Vec<i64>,
}

/// A polynomial as `number * monomial * whole`.
pub(super) struct Converted {
    number: Rational,
    monomial: Monomial,
    pub(super) whole: IntegerPoly,
}

impl Variables {
    pub(super) fn of(polys: &[&Poly]) -> Option<Variables> {
        let mut roots: BTreeMap<Expr, i64> = BTreeMap::new();
        for (kernel, e) in polys
            .iter()
            .flat_map(|p| p.0.keys())
            .flat_map(|m| m.0.iter())
        {
            let root = roots.entry(*kernel).or_insert(1);
            let divisor = exponent::gcd(
                root.unsigned_abs().into(),
                e.denominator().unsigned_abs().into(),
            );
            *root = root.checked_mul(e.denominator() / i64::try_from(divisor).ok()?)?;
        }
        let (kernels, roots) = roots.into_iter().unzip();
        Some(Variables { kernels, roots })
    }

    pub(super) fn count(&self) -> usize {
        self.kernels.len()
    }

    /// The number of a kernel's variable.
    pub(super) fn position(&self, kernel: Expr) -> Option<usize> {
        self.kernels.binary_search(&kernel).ok()
    }

    pub(super) fn convert(&self, poly: &Poly, pool: &Pool) -> Option<Converted> {
        let monomial = poly.common_monomial();
        let number = poly.positive_content(pool)?;
        let inverse = monomial.inverse()?;
        let mut whole = IntegerPoly::default();
        for (m, coefficient) in &poly.0 {
            let m = m.times(&inverse)?;
            let mut exponents = vec![0u32; self.count()];
            for &(kernel, e) in &m.0 {
                let i = self.position(kernel)?;
                let scaled = e.times(Exponent::whole(self.roots[i]))?.as_whole()?;
                exponents[i] = u32::try_from(scaled)
                    .ok()
                    .filter(|_| scaled <= MAX_DEGREE)?;
            }
            let value: IBig = (coefficient / &number).numerator().clone();
            whole.add_term(exponents.into(), value);
        }
        Some(Converted {
            number,
            monomial,
            whole,
        })
    }

    pub(super) fn restore(&self, whole: &IntegerPoly) -> Option<Poly> {
        let mut poly = Poly::zero();
        for (exponents, value) in &whole.0 {
            let mut monomial = Vec::new();
            for (i, &e) in exponents.iter().enumerate().filter(|(_, e)| **e != 0) {
                let e = Rational::from_parts_signed(e.into(), self.roots[i].into());
                monomial.push((self.kernels[i], Exponent::from_rational(&e)?));
            }
            poly.add_term(Monomial(monomial), Rational::from(value.clone()));
        }
        Some(poly)
    }
}

impl Poly {
    fn kernels(&self) -> BTreeSet<Expr> {
        self.0
            .keys()
            .flat_map(|m| m.0.iter().map(|(kernel, _)| *kernel))
            .collect()
    }

    /// The exact quotient, if the division leaves nothing; negative exponents may appear in it only as
    /// a common monomial.
    pub(super) fn exact_quotient(&self, divisor: &Poly, pool: &Pool) -> Option<Poly> {
        if self.0.len() < 2 && divisor.0.len() > 1 {
            return None;
        }
        let kernels = self.kernels();
        if !divisor.kernels().is_subset(&kernels) {
            return None;
        }
        let variables = Variables::of(&[self, divisor])?;
        let (a, b) = (
            variables.convert(self, pool)?,
            variables.convert(divisor, pool)?,
        );
        let quotient = a
            .whole
            .exact_quotient(&b.whole, &mut Budget::share(pool, 1))?;
        let poly = variables.restore(&quotient)?.scaled(&(a.number / b.number));
        poly.times_monomial(&a.monomial.times(&b.monomial.inverse()?)?)
    }

    /// A common divisor that is more than a monomial; none if there is none, or none was found within
    /// the budget.
    pub(super) fn gcd(&self, other: &Poly, pool: &Pool) -> Option<Poly> {
        if self.0.len() < 2 || other.0.len() < 2 || self.kernels().is_disjoint(&other.kernels()) {
            return None;
        }
        let variables = Variables::of(&[self, other])?;
        let (a, b) = (
            variables.convert(self, pool)?,
            variables.convert(other, pool)?,
        );
        let common = super::gcd::gcd(
            &a.whole,
            &b.whole,
            variables.count(),
            &mut Budget::share(pool, 1),
        )?;
        if common.is_constant() {
            None
        } else {
            variables.restore(&common)
        }
    }

    /// Factors whose product is the polynomial, up to a number and a monomial: what all coefficients
    /// by powers of some kernel share comes out.
    pub(super) fn split_contents(&self, pool: &Pool) -> Vec<Poly> {
        let mut budget = Budget::share(pool, 4);
        let mut done = Vec::new();
        let mut pending = vec![self.clone()];
        while let Some(poly) = pending.pop() {
            match poly.content_and_rest(pool, &mut budget) {
                Some((content, rest)) => pending.extend([content, rest]),
                None => done.push(poly),
            }
        }
        done.sort();
        done
    }

    fn content_and_rest(&self, pool: &Pool, budget: &mut Budget<'_>) -> Option<(Poly, Poly)> {
        let variables = Variables::of(&[self])?;
        let whole = variables.convert(self, pool)?.whole;
        (0..variables.count()).find_map(|variable| {
            let content = super::gcd::content(&whole, variable, variables.count(), budget)?;
            if content.is_constant() || whole.degree(variable) == 0 {
                return None;
            }
            let rest = whole.exact_quotient(&content, budget)?;
            Some((variables.restore(&content)?, variables.restore(&rest)?))
        })
    }
}
