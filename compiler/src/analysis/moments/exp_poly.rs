//! Exponential polynomials in time, `sum c t^n exp(lambda t)`, and the scalar linear equation they
//! solve: the closed forms of moment equations.

use super::affine::affine;
use crate::symbolic::{Expr, Node, Pool, Rational, Symbol, Truth};

/// One term `coefficient * t^power * exp(rate * t)`; rate and coefficient are free of time.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
struct Term {
    rate: Expr,
    power: u32,
    coefficient: Expr,
}

/// A sum of terms `c t^n exp(lambda t)` with formulas in the parameters as `c` and `lambda`.
#[derive(Clone, Debug, Default)]
pub(super) struct ExpPoly {
    terms: Vec<Term>,
}

impl ExpPoly {
    /// A constant.
    pub(super) fn constant(pool: &Pool, value: Expr) -> Self {
        let mut result = Self::default();
        result.push(
            pool,
            Term {
                rate: pool.zero(),
                power: 0,
                coefficient: value,
            },
        );
        result
    }

    /// Reads a formula in time and parameters, free of anything else: sums of products of powers of
    /// `t` and exponentials of affine functions of `t`.
    pub(super) fn read(pool: &Pool, time: Symbol, formula: Expr) -> Option<Self> {
        if !pool.depends_on(formula, time) {
            return Some(Self::constant(pool, formula));
        }
        let expanded = pool.expand(formula);
        let mut result = Self::default();
        for term in summands(pool, expanded) {
            let mut read = Term {
                rate: pool.zero(),
                power: 0,
                coefficient: pool.one(),
            };
            for factor in factors(pool, term) {
                read = read_factor(pool, time, read, factor)?;
            }
            result.push(pool, read);
        }
        Some(result)
    }

    /// The formula in time and parameters.
    pub(super) fn formula(&self, pool: &Pool, time: Symbol) -> Expr {
        let t = pool.var(time);
        let terms = self.terms.iter().map(|term| {
            let power = pool.pow(t, pool.int(i64::from(term.power)));
            pool.product([term.coefficient, power, pool.exp(pool.mul(term.rate, t))])
        });
        pool.sum(terms.collect::<Vec<_>>())
    }

    /// Adds `factor * other`.
    pub(super) fn add_scaled(&mut self, pool: &Pool, factor: Expr, other: &Self) {
        for term in &other.terms {
            let coefficient = pool.mul(factor, term.coefficient);
            self.push(
                pool,
                Term {
                    coefficient,
                    ..*term
                },
            );
        }
    }

    /// Adds the product of two.
    pub(super) fn add_product(&mut self, pool: &Pool, left: &Self, right: &Self) {
        for a in &left.terms {
            for b in &right.terms {
                self.push(
                    pool,
                    Term {
                        rate: pool.add(a.rate, b.rate),
                        power: a.power + b.power,
                        coefficient: pool.mul(a.coefficient, b.coefficient),
                    },
                );
            }
        }
    }

    fn push(&mut self, pool: &Pool, mut term: Term) {
        // Two spellings of one rate would only leave two terms where one would do.
        term.rate = pool.expand(pool.simplify(term.rate));
        let same = |t: &&mut Term| t.power == term.power && t.rate == term.rate;
        match self.terms.iter_mut().find(same) {
            Some(known) => known.coefficient = pool.add(known.coefficient, term.coefficient),
            None => self.terms.push(term),
        }
        self.terms.retain(|t| !pool.is_zero_literal(t.coefficient));
    }

    /// The solution of `y' = rate y + forcing`, `y(0) = initial`, by variation of constants.
    ///
    /// None where it cannot be told whether a rate of the forcing equals `rate`. Where two rates are
    /// different formulas, the result divides by their difference: it holds for all parameters but
    /// those at which they coincide, and there by continuity.
    pub(super) fn solve(pool: &Pool, rate: Expr, forcing: &Self, initial: Expr) -> Option<Self> {
        let rate = pool.simplify(rate);
        let mut result = Self::default();
        result.push(
            pool,
            Term {
                rate,
                power: 0,
                coefficient: initial,
            },
        );
        for &term in &forcing.terms {
            result.add_response(pool, rate, term)?;
        }
        Some(result)
    }

    /// Adds the response `exp(a t) int_0^t exp(-a s) c s^n exp(lambda s) ds` to one term.
    fn add_response(&mut self, pool: &Pool, a: Expr, term: Term) -> Option<()> {
        let difference = pool.simplify(pool.sub(term.rate, a));
        match pool.is_zero(difference) {
            Truth::Yes => {
                let power = term.power + 1;
                let coefficient = pool.div(term.coefficient, pool.int(i64::from(power)));
                self.push(
                    pool,
                    Term {
                        rate: a,
                        power,
                        coefficient,
                    },
                );
            }
            Truth::No(_) => self.add_distinct(pool, a, difference, term),
            Truth::CannotTell => return None,
        }
        Some(())
    }

    /// As above for `mu = lambda - a` other than zero:
    /// `int_0^t s^n exp(mu s) ds = [exp(mu s) sum_k (-1)^k n!/(n-k)! s^(n-k)/mu^(k+1)]_0^t`.
    fn add_distinct(&mut self, pool: &Pool, a: Expr, mu: Expr, term: Term) {
        let mut coefficient = pool.div(term.coefficient, mu);
        for power in (0..=term.power).rev() {
            self.push(
                pool,
                Term {
                    rate: term.rate,
                    power,
                    coefficient,
                },
            );
            if power == 0 {
                self.push(
                    pool,
                    Term {
                        rate: a,
                        power: 0,
                        coefficient: pool.neg(coefficient),
                    },
                );
            }
            let step = pool.div(pool.int(-i64::from(power)), mu);
            coefficient = pool.mul(coefficient, step);
        }
    }
}

/// Multiplies a term by a factor in time and parameters.
fn read_factor(pool: &Pool, time: Symbol, mut term: Term, factor: Expr) -> Option<Term> {
    if !pool.depends_on(factor, time) {
        term.coefficient = pool.mul(term.coefficient, factor);
        return Some(term);
    }
    if let Some(exponent) = exponent_of(pool, factor) {
        let exponent = affine(pool, exponent, &[time])?;
        term.coefficient = pool.mul(term.coefficient, pool.exp(exponent.constant));
        term.rate = pool.add(term.rate, exponent.slopes[0]);
        return Some(term);
    }
    let power = match &*pool.node(factor) {
        Node::Symbol(_) => 1,
        Node::Power(base, exponent) if *base == pool.var(time) => {
            small_power(pool.as_number(*exponent)?)?
        }
        _ => return None,
    };
    term.power += power;
    Some(term)
}

/// `x` of `exp(x)`, and of its powers.
pub(super) fn exponent_of(pool: &Pool, factor: Expr) -> Option<Expr> {
    use crate::symbolic::Function;
    match &*pool.node(factor) {
        Node::Call(Function::Exp, arguments) => Some(arguments[0]),
        Node::Power(base, exponent) => {
            exponent_of(pool, *base).map(|inner| pool.mul(*exponent, inner))
        }
        _ => None,
    }
}

/// A small non-negative integer exponent.
pub(super) fn small_power(number: Rational) -> Option<u32> {
    (0..=64_u32).find(|&n| number == Rational::from(n))
}

/// The terms of a sum; the formula itself where it is none.
pub(super) fn summands(pool: &Pool, formula: Expr) -> Vec<Expr> {
    match &*pool.node(formula) {
        Node::Sum(terms) => terms.to_vec(),
        _ => vec![formula],
    }
}

/// The factors of a product; the formula itself where it is none.
pub(super) fn factors(pool: &Pool, formula: Expr) -> Vec<Expr> {
    match &*pool.node(formula) {
        Node::Product(factors) => factors.to_vec(),
        _ => vec![formula],
    }
}
