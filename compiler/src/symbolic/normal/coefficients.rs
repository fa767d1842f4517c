//! Normal forms as polynomials in symbols, or in one kernel.

use std::collections::BTreeMap;

use super::super::node::{Expr, Symbol};
use super::Normalizer;
use super::exponent::Exponent;
use super::fraction::Fraction;
use super::poly::{Monomial, Poly};

/// A formula as a quotient of two polynomials in one kernel.
#[derive(Debug)]
pub(crate) struct OneKernel {
    /// The kernel to its smallest power; the polynomials count powers of this.
    pub(crate) kernel: Expr,
    /// Coefficients of the numerator by powers.
    pub(crate) numerator: BTreeMap<i64, Expr>,
    /// Coefficients of the denominator by powers.
    pub(crate) denominator: BTreeMap<i64, Expr>,
}

impl Normalizer<'_> {
    pub(super) fn coefficients(
        &self,
        fraction: &Fraction,
        symbols: &[Symbol],
    ) -> Option<BTreeMap<Vec<u32>, Expr>> {
        let free = |e: Expr| {
            !symbols
                .iter()
                .any(|&symbol| self.pool.depends_on(e, symbol))
        };
        let kernels = fraction
            .denominator
            .iter()
            .flat_map(|(f, _)| f.0.keys())
            .flat_map(|m| m.0.iter());
        if !kernels.into_iter().all(|(kernel, _)| free(*kernel)) {
            return None;
        }
        let variables: Vec<Expr> = symbols
            .iter()
            .map(|&symbol| self.pool.var(symbol))
            .collect();
        let mut groups: BTreeMap<Vec<u32>, Poly> = BTreeMap::new();
        for (monomial, coefficient) in &fraction.numerator.0 {
            let mut powers = vec![0u32; variables.len()];
            let mut rest = Monomial::one();
            for &(kernel, e) in &monomial.0 {
                match variables.iter().position(|&v| v == kernel) {
                    Some(i) => powers[i] = u32::try_from(e.as_whole()?).ok()?,
                    None if free(kernel) => rest = rest.times(&Monomial::of(kernel, e))?,
                    None => return None,
                }
            }
            groups
                .entry(powers)
                .or_default()
                .add_term(rest, coefficient.clone());
        }
        let over = |numerator: Poly| {
            self.formula(&Fraction {
                numerator,
                denominator: fraction.denominator.clone(),
            })
        };
        Some(
            groups
                .into_iter()
                .map(|(powers, poly)| (powers, over(poly)))
                .collect(),
        )
    }

    pub(super) fn one_kernel(&self, fraction: &Fraction, symbol: Symbol) -> Option<OneKernel> {
        let mut denominator = Poly::one();
        for (factor, times) in &fraction.denominator {
            for _ in 0..*times {
                denominator = self.poly_product(&denominator, factor)?;
            }
        }
        let numerator = &fraction.numerator;
        let dependent = numerator
            .0
            .keys()
            .chain(denominator.0.keys())
            .flat_map(|m| m.0.iter().copied());
        let dependent: Vec<(Expr, Exponent)> = dependent
            .filter(|(kernel, _)| self.pool.depends_on(*kernel, symbol))
            .collect();
        let (kernel, _) = *dependent.first()?;
        if dependent.iter().any(|(other, _)| *other != kernel) {
            return None;
        }
        // The power nearest to 0 is the variable, if all others are multiples of it.
        let unit = dependent.iter().map(|(_, e)| {
            if e.is_negative() {
                e.negated()
            } else {
                Some(*e)
            }
        });
        let unit = unit.collect::<Option<Vec<_>>>()?.into_iter().min()?;
        let sort = |poly: &Poly| -> Option<BTreeMap<i64, Expr>> {
            let mut groups: BTreeMap<i64, Poly> = BTreeMap::new();
            for (monomial, coefficient) in &poly.0 {
                let (count, rest) = monomial.exponent(kernel).divided_by(unit)?;
                if !rest.is_zero() {
                    return None;
                }
                groups
                    .entry(count)
                    .or_default()
                    .add_term(monomial.without(kernel), coefficient.clone());
            }
            Some(
                groups
                    .into_iter()
                    .map(|(n, poly)| (n, self.poly_formula(&poly)))
                    .collect(),
            )
        };
        let power = self.monomial_formula(&Monomial::of(kernel, unit));
        Some(OneKernel {
            kernel: power,
            numerator: sort(numerator)?,
            denominator: sort(&denominator)?,
        })
    }
}
