//! A formula as a product of powers, with the signs of the factors: what roots and logarithms need.

use dashu_base::Abs;

use super::super::facts::Sign;
use super::super::node::{Expr, Node, Rational};
use super::exponent::Exponent;
use super::fraction::Fraction;
use super::poly::{Monomial, Poly};
use super::{Mode, Normalizer};

/// A factor of a product.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Base {
    Kernel(Expr),
    /// A sum; the last coefficient is positive.
    Sum(Poly),
}

/// `coefficient * product of base^exponent`; the bases are distinct, the exponents not zero.
#[derive(Clone, Debug)]
pub(super) struct Split {
    pub(super) coefficient: Rational,
    pub(super) factors: Vec<(Base, Exponent)>,
}

/// A split with its factors sorted by what is known of their signs, for a formula that is known to be
/// positive or zero wherever the whole has a value (it stands under a root or in a logarithm).
#[derive(Debug)]
pub(super) struct BySign {
    /// The size of the coefficient.
    pub(super) coefficient: Rational,
    /// Factors that are positive or zero.
    pub(super) positive: Vec<(Base, Exponent)>,
    /// Even powers of factors of unknown sign.
    pub(super) even: Vec<(Base, Exponent)>,
    /// What only together is known to be positive or zero: two or more factors of unknown sign.
    pub(super) mixed: Option<Poly>,
}

impl Split {
    fn one() -> Split {
        Split {
            coefficient: Rational::ONE,
            factors: Vec::new(),
        }
    }

    fn include(&mut self, base: Base, exponent: Exponent) -> Option<()> {
        match self.factors.iter_mut().find(|(b, _)| *b == base) {
            Some((_, e)) => *e = e.plus(exponent)?,
            None => self.factors.push((base, exponent)),
        }
        self.factors.retain(|(_, e)| !e.is_zero());
        Some(())
    }

    fn merge(&mut self, other: Split) -> Option<()> {
        self.coefficient *= other.coefficient;
        other
            .factors
            .into_iter()
            .try_for_each(|(base, exponent)| self.include(base, exponent))
    }

    fn raised(self, n: &Rational) -> Option<Split> {
        let coefficient = super::super::power::exact_power(&self.coefficient, n)?;
        let exponent = Exponent::from_rational(n)?;
        let factors = self
            .factors
            .into_iter()
            .map(|(b, e)| Some((b, e.times(exponent)?)));
        Some(Split {
            coefficient,
            factors: factors.collect::<Option<_>>()?,
        })
    }
}

impl Normalizer<'_> {
    /// The formula in factors: those it is written in, each taken further apart. None for zero.
    pub(super) fn split(&self, e: Expr) -> Option<Split> {
        match &*self.pool.node(e) {
            Node::Product(factors) => {
                let mut result = Split::one();
                for &factor in factors {
                    result.merge(self.split(factor)?)?;
                }
                Some(result)
            }
            Node::Power(base, exponent) => match self.pool.as_number(*exponent) {
                Some(n) if n.is_int() => self.split(*base)?.raised(&n),
                _ => self.split_fraction(&self.normal(e)),
            },
            _ => self.split_fraction(&self.normal(e)),
        }
    }

    /// A normal form in factors. None for zero.
    pub(super) fn split_fraction(&self, fraction: &Fraction) -> Option<Split> {
        let (coefficient, monomial, factor) = self.factored(&fraction.numerator)?;
        let mut result = Split {
            coefficient,
            factors: Vec::new(),
        };
        for (kernel, e) in monomial.0 {
            result.include(Base::Kernel(kernel), e)?;
        }
        self.include_sum(&mut result, &factor, 1)?;
        for (f, times) in &fraction.denominator {
            self.include_sum(&mut result, f, -i64::from(*times))?;
        }
        Some(result)
    }

    /// Multiplies a sum to a power into a split, as its square-free factors.
    fn include_sum(&self, split: &mut Split, poly: &Poly, times: i64) -> Option<()> {
        if poly.is_one() {
            return Some(());
        }
        // Sums are kept without content and common monomial: undivided, one is its own only factor.
        let whole = || (false, vec![(poly.clone(), 1)]);
        let (turned, factors) = poly.squarefree(self.pool).unwrap_or_else(whole);
        let mut negative = turned;
        for (factor, m) in factors {
            let (turned, parts) = match self.mode {
                Mode::Proof => factor.rational_factors(self.pool),
                Mode::Light => (false, vec![factor]),
            };
            negative ^= turned && m % 2 == 1;
            for part in parts {
                let (coefficient, monomial, part) = self.factored(&part)?;
                debug_assert!(monomial.is_one());
                negative ^= coefficient < Rational::ZERO && m % 2 == 1;
                let exponent = Exponent::whole(i64::from(m).checked_mul(times)?);
                split.include(Base::Sum(part), exponent)?;
            }
        }
        if negative && times % 2 != 0 {
            split.coefficient = -std::mem::take(&mut split.coefficient);
        }
        Some(())
    }

    /// The sign of a factor without imaginary unit.
    pub(super) fn base_sign(&self, base: &Base) -> Sign {
        self.pool.sign(self.base_expr(base))
    }

    fn base_expr(&self, base: &Base) -> Expr {
        match base {
            Base::Kernel(kernel) => *kernel,
            Base::Sum(poly) => self.poly_formula(poly),
        }
    }

    /// Sorts factors by sign. None where the whole cannot be positive or zero.
    pub(super) fn by_sign(&self, split: Split) -> Option<BySign> {
        let Split {
            mut coefficient,
            factors,
        } = split;
        let (mut positive, mut even, mut odd, mut complex) = (vec![], vec![], vec![], vec![]);
        for (base, exponent) in factors {
            if self.is_complex(self.base_expr(&base)) {
                complex.push((base, exponent));
                continue;
            }
            let sign = self.base_sign(&base);
            match exponent.as_whole() {
                _ if sign.is_non_negative() => positive.push((base, exponent)),
                // A broken power has a value for a positive base only.
                None => positive.push((base, exponent)),
                Some(n) if sign.is_non_positive() => {
                    if n % 2 != 0 {
                        coefficient = -coefficient;
                    }
                    positive.push((negated_base(base), exponent));
                }
                Some(n) if n % 2 == 0 => even.push((base, exponent)),
                Some(n) => odd.push((base, n)),
            }
        }
        let sign = coefficient.signum();
        let mut result = BySign {
            coefficient: coefficient.abs(),
            positive,
            even,
            mixed: None,
        };
        match odd.len() {
            0 if complex.is_empty() => return (sign > Rational::ZERO).then_some(result),
            1 if complex.is_empty() => {
                // The rest is positive, so this factor has the sign of the coefficient.
                let (base, n) = odd.remove(0);
                let base = if sign < Rational::ZERO {
                    negated_base(base)
                } else {
                    base
                };
                result.positive.push((base, Exponent::whole(n)));
                return Some(result);
            }
            _ => {}
        }
        let mut mixed = Fraction::constant(sign);
        for (base, n) in odd {
            if n != 1 {
                result.even.push((base.clone(), Exponent::whole(n - 1)));
            }
            mixed = self.multiply(&mixed, &Fraction::polynomial(self.base_poly(&base)))?;
        }
        for (base, exponent) in complex {
            mixed = self.multiply(&mixed, &self.base_power(&base, exponent)?)?;
        }
        result.mixed = Some(mixed.numerator).filter(|_| mixed.denominator.is_empty());
        result.mixed.is_some().then_some(result)
    }

    /// The factor as a polynomial.
    pub(super) fn base_poly(&self, base: &Base) -> Poly {
        match base {
            Base::Kernel(kernel) => Poly::term(Monomial::of(*kernel, Exponent::ONE), Rational::ONE),
            Base::Sum(poly) => poly.clone(),
        }
    }
}

/// The negative of a factor, as a factor.
fn negated_base(base: Base) -> Base {
    match base {
        Base::Kernel(kernel) => Base::Sum(Poly::term(
            Monomial::of(kernel, Exponent::ONE),
            Rational::from(-1),
        )),
        Base::Sum(poly) => Base::Sum(poly.negated()),
    }
}
