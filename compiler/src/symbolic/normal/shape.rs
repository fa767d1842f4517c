//! Shapes of one normal form: candidates for what a person would write.

use std::cmp::Reverse;
use std::collections::BTreeMap;

use super::super::function::Function;
use super::super::node::{Expr, Node, Rational};
use super::Normalizer;
use super::exponent::Exponent;
use super::fraction::Fraction;
use super::poly::{Monomial, Poly};

/// Numerators with more terms are not searched for factors.
const MAX_TERMS: usize = 60;

/// Which kernels are taken out of a sum first.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Preference {
    /// Those with states in them.
    States,
    /// Those without.
    Parameters,
}

impl Normalizer<'_> {
    /// Equal formulas in different shapes: expanded, with a common monomial taken out, in factors,
    /// and with kernels taken out of groups of terms. None where all must weigh more than `limit`.
    pub(in super::super) fn shapes(&self, fraction: &Fraction, limit: u64) -> Vec<Expr> {
        if fraction.numerator.0.len() > MAX_TERMS && least_weight(&fraction.numerator) > limit {
            return Vec::new();
        }
        let (numerator, below) = self.oriented(fraction);
        let mut shapes = vec![self.poly_formula(&numerator)];
        if numerator.0.len() > 1 {
            self.outside(&numerator, &mut shapes, &|poly| self.poly_formula(poly));
            if numerator.0.len() <= MAX_TERMS {
                if !self.takes_out_decay(&numerator.common_monomial(), &numerator) {
                    shapes.extend(self.in_factors(&numerator));
                }
                for preference in [Preference::States, Preference::Parameters] {
                    self.outside(&numerator, &mut shapes, &|poly| {
                        self.grouped(poly, preference)
                    });
                    shapes.push(self.grouped(&numerator, preference));
                }
            }
        }
        shapes
            .into_iter()
            .map(|shape| self.pool.mul(shape, below))
            .collect()
    }

    /// What all terms share times the rest in a shape of its own: once with the number's denominator
    /// inside, as in `mu - sigma^2/2`, once outside, as in `(x - y)/2`.
    fn outside(&self, poly: &Poly, shapes: &mut Vec<Expr>, shape: &dyn Fn(&Poly) -> Expr) {
        let Some((number, monomial, factor)) = self.factored(poly) else {
            return;
        };
        if self.takes_out_decay(&monomial, poly) {
            return;
        }
        let negative = factor.0.values().all(|c| *c < Rational::ZERO)
            || (number < Rational::ZERO && factor.0.values().any(|c| *c < Rational::ZERO));
        let sign = Rational::from(if negative { -1 } else { 1 });
        let (number, factor) = (number * &sign, factor.scaled(&sign));
        let monomial = self.monomial_formula(&monomial);
        let divisor = Rational::from_parts(1.into(), number.denominator().clone());
        let inner = shape(&factor.scaled(&divisor));
        let outer = self.pool.number(&number / &divisor);
        shapes.push(self.pool.product([outer, monomial, inner]));
        if !divisor.is_one() {
            shapes.push(
                self.pool
                    .product([self.pool.number(number), monomial, shape(&factor)]),
            );
        }
    }

    /// Whether a falling exponential would come out of terms that do not have it, which leaves rising
    /// ones inside: nobody writes `exp(-x)*(exp(x) - 1)` for `1 - exp(-x)`.
    fn takes_out_decay(&self, monomial: &Monomial, poly: &Poly) -> bool {
        let exponential = |e: Expr| matches!(&*self.pool.node(e), Node::Call(Function::Exp, _));
        let mut outside = monomial
            .0
            .iter()
            .filter(|(kernel, e)| e.is_negative() && exponential(*kernel));
        outside.any(|(kernel, _)| poly.0.keys().any(|m| !m.exponent(*kernel).is_negative()))
    }

    /// The polynomial as a product of powers of factors, as far as square-free decomposition and
    /// contents find them.
    fn in_factors(&self, poly: &Poly) -> Option<Expr> {
        let (negative, powers) = poly.squarefree(self.pool)?;
        let content = poly.positive_content(self.pool)?;
        let mut number = if negative { -content } else { content };
        let mut factors = vec![self.monomial_formula(&poly.common_monomial())];
        for (factor, times) in powers {
            let mut product = factor.clone();
            for part in factor.split_contents(self.pool) {
                if let Some(rest) = product.exact_quotient(&part, self.pool) {
                    product = rest;
                }
                let turned = self.leads_negative(self.poly_formula(&part));
                let part = if turned { part.negated() } else { part };
                if turned && times % 2 == 1 {
                    number = -number;
                }
                factors.push(self.pool.pow(
                    self.grouped(&part, Preference::States),
                    self.pool.int(times.into()),
                ));
            }
            // The parts make the factor up to a number, unless a division was over budget.
            let left = product.as_constant()?;
            number *= left.pow(isize::try_from(times).unwrap_or(1));
        }
        if number < Rational::ZERO
            && let Some(factor) = factors
                .iter_mut()
                .find(|f| matches!(&*self.pool.node(**f), Node::Sum(_)))
        {
            *factor = self.pool.sum([self.pool.neg(*factor)]);
            number = -number;
        }
        let number = self.pool.number(number);
        Some(self.pool.product(factors.into_iter().chain([number])))
    }

    /// Takes the kernel that occurs in most terms out of those, and goes on with both parts.
    fn grouped(&self, poly: &Poly, preference: Preference) -> Expr {
        let Some((kernel, exponent)) = self.most_frequent(poly, preference) else {
            return self.poly_formula(poly);
        };
        let (mut inside, mut outside) = (Poly::zero(), Poly::zero());
        let power = Monomial::of(kernel, exponent);
        for (monomial, coefficient) in &poly.0 {
            if monomial.exponent(kernel) == exponent {
                inside.add_term(monomial.without(kernel), coefficient.clone());
            } else {
                outside.add_term(monomial.clone(), coefficient.clone());
            }
        }
        let mut inner = Vec::new();
        self.outside(&inside, &mut inner, &|poly| self.grouped(poly, preference));
        let inner = inner
            .first()
            .copied()
            .unwrap_or_else(|| self.grouped(&inside, preference));
        let group = self.pool.mul(self.monomial_formula(&power), inner);
        if outside.is_zero() {
            group
        } else {
            self.pool.add(group, self.grouped(&outside, preference))
        }
    }

    /// The power of a kernel that most terms share; at least two of them.
    fn most_frequent(&self, poly: &Poly, preference: Preference) -> Option<(Expr, Exponent)> {
        let mut counts: BTreeMap<(Expr, Exponent), usize> = BTreeMap::new();
        for &power in poly.0.keys().flat_map(|m| m.0.iter()) {
            *counts.entry(power).or_insert(0) += 1;
        }
        let preferred = |kernel: Expr| {
            let states = self.pool.inner.borrow().entry(kernel).rank >= 3;
            states == (preference == Preference::States)
        };
        let shared = counts.into_iter().filter(|(_, count)| *count >= 2);
        let best = shared
            .max_by_key(|((kernel, _), count)| (preferred(*kernel), *count, Reverse(*kernel)));
        best.map(|(power, _)| power)
    }
}

/// What the terms of a sum weigh at the very least, with a common monomial taken out.
fn least_weight(poly: &Poly) -> u64 {
    let common = poly.common_monomial().0.len();
    let term = |m: &Monomial| m.0.len().saturating_sub(common).max(1) as u64;
    poly.0.keys().map(term).sum()
}
