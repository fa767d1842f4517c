//! Exponential polynomials in time with waves, `sum c t^n exp(lambda t) cos(omega t)` and the like, and
//! the scalar linear equation they solve: the closed forms of moment equations.

mod read;
mod solve;

pub(super) use read::{exponent_of, factors, small_power, summands};

use crate::symbolic::{Expr, Function, Pool, Symbol};

/// What a term oscillates with; its frequency is free of time.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Wave {
    /// Not at all.
    None,
    /// `cos(omega t)`.
    Cos(Expr),
    /// `sin(omega t)`.
    Sin(Expr),
}

/// One term `coefficient * t^power * exp(rate * t) * wave`; rate and coefficient are free of time.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
struct Term {
    rate: Expr,
    power: u32,
    wave: Wave,
    coefficient: Expr,
}

impl Term {
    fn constant(pool: &Pool, value: Expr) -> Self {
        Self {
            rate: pool.zero(),
            power: 0,
            wave: Wave::None,
            coefficient: value,
        }
    }
}

/// A sum of terms `c t^n exp(lambda t)`, each by itself or times a sine or cosine, with formulas in the
/// parameters as coefficients, rates and frequencies.
#[derive(Clone, Debug, Default)]
pub(super) struct ExpPoly {
    terms: Vec<Term>,
}

impl ExpPoly {
    /// A constant.
    pub(super) fn constant(pool: &Pool, value: Expr) -> Self {
        let mut result = Self::default();
        result.push(pool, Term::constant(pool, value));
        result
    }

    /// Of how many terms it is a sum.
    pub(super) fn terms(&self) -> usize {
        self.terms.len()
    }

    /// The formula in time and parameters.
    pub(super) fn formula(&self, pool: &Pool, time: Symbol) -> Expr {
        let t = pool.var(time);
        let terms = self.terms.iter().map(|term| {
            let power = pool.pow(t, pool.int(i64::from(term.power)));
            let growth = pool.exp(pool.mul(term.rate, t));
            let wave = match term.wave {
                Wave::None => pool.one(),
                Wave::Cos(omega) => pool.call(Function::Cos, &[pool.mul(omega, t)]),
                Wave::Sin(omega) => pool.call(Function::Sin, &[pool.mul(omega, t)]),
            };
            pool.product([term.coefficient, power, growth, wave])
        });
        pool.sum(terms.collect::<Vec<_>>())
    }

    /// Adds the product of two.
    pub(super) fn add_product(&mut self, pool: &Pool, left: &Self, right: &Self) {
        for &a in &left.terms {
            for &b in &right.terms {
                let product = Term {
                    rate: pool.add(a.rate, b.rate),
                    power: a.power + b.power,
                    wave: Wave::None,
                    coefficient: pool.mul(a.coefficient, b.coefficient),
                };
                for (wave, factor) in waves(pool, a.wave, b.wave) {
                    let coefficient = pool.mul(factor, product.coefficient);
                    self.push(
                        pool,
                        Term {
                            wave,
                            coefficient,
                            ..product
                        },
                    );
                }
            }
        }
    }

    /// Adds a term, to one of the same shape if there is one.
    fn push(&mut self, pool: &Pool, term: Term) {
        let mut term = normalised(pool, term);
        for known in &mut self.terms {
            if known.power != term.power || known.rate != term.rate {
                continue;
            }
            if let Some(sign) = same_wave(pool, known.wave, term.wave) {
                term.coefficient = pool.mul(pool.int(sign), term.coefficient);
                known.coefficient = pool.add(known.coefficient, term.coefficient);
                self.terms.retain(|t| !pool.is_zero_literal(t.coefficient));
                return;
            }
        }
        if !pool.is_zero_literal(term.coefficient) {
            self.terms.push(term);
        }
    }
}

/// The term with rate and frequency in one spelling: two would only leave two terms where one would do.
fn normalised(pool: &Pool, mut term: Term) -> Term {
    let spelled = |e: Expr| pool.expand(pool.simplify(e));
    term.rate = spelled(term.rate);
    term.wave = match term.wave {
        Wave::None => Wave::None,
        Wave::Cos(omega) => match spelled(omega) {
            still if pool.is_zero_literal(still) => Wave::None,
            omega => Wave::Cos(omega),
        },
        Wave::Sin(omega) => {
            let omega = spelled(omega);
            if pool.is_zero_literal(omega) {
                term.coefficient = pool.zero();
            }
            Wave::Sin(omega)
        }
    };
    term
}

/// The sign that makes the second wave the first: `sin(-omega t) = -sin(omega t)`.
fn same_wave(pool: &Pool, first: Wave, second: Wave) -> Option<i64> {
    let mirrored = |a: Expr, b: Expr| pool.is_zero_literal(pool.expand(pool.add(a, b)));
    match (first, second) {
        _ if first == second => Some(1),
        (Wave::Cos(a), Wave::Cos(b)) if mirrored(a, b) => Some(1),
        (Wave::Sin(a), Wave::Sin(b)) if mirrored(a, b) => Some(-1),
        _ => None,
    }
}

/// The product of two waves as a sum of waves with factors (Abramowitz and Stegun 1964, 4.3.31-33).
fn waves(pool: &Pool, left: Wave, right: Wave) -> Vec<(Wave, Expr)> {
    let half = |sign: i64| pool.ratio(sign, 2);
    let (sum, difference) = (|a, b| pool.add(a, b), |a, b| pool.sub(a, b));
    match (left, right) {
        (Wave::None, other) | (other, Wave::None) => vec![(other, pool.one())],
        (Wave::Cos(a), Wave::Cos(b)) => vec![
            (Wave::Cos(difference(a, b)), half(1)),
            (Wave::Cos(sum(a, b)), half(1)),
        ],
        (Wave::Sin(a), Wave::Sin(b)) => vec![
            (Wave::Cos(difference(a, b)), half(1)),
            (Wave::Cos(sum(a, b)), half(-1)),
        ],
        (Wave::Sin(a), Wave::Cos(b)) | (Wave::Cos(b), Wave::Sin(a)) => vec![
            (Wave::Sin(sum(a, b)), half(1)),
            (Wave::Sin(difference(a, b)), half(1)),
        ],
    }
}
