//! Expectations of formulas with a kink, or a normal distribution function, of a Gaussian vector:
//! the closed forms behind option prices.
//!
//! Everything is brought to the positive part of a difference: `max(a, b) = b + (a - b)^+`,
//! `min(a, b) = a - (a - b)^+`, `|d| = 2 d^+ - d`. Where `d` is affine in the vector, its positive part
//! has the mean `m Phi(m/s) + s phi(m/s)` (Bachelier 1900); where `d` is the difference of two
//! exponentials of affine functions, it is a difference of two tilted probabilities (Black and Scholes
//! 1973 with a constant for one of them, Margrabe 1978 with two).

use std::collections::BTreeMap;

use super::exp_poly::{factors, summands};
use super::gaussian::{Gaussian, covariance_symbol, mean_symbol};
use super::tilting::Tilted;
use crate::model::Model;
use crate::symbolic::{Expr, Function, Node, Pool};

/// Expectations in the symbols that stand for means and covariances.
pub(super) struct Kinks<'a> {
    pub(super) model: &'a Model,
    pub(super) gaussian: &'a Gaussian,
}

impl Kinks<'_> {
    /// `E[formula]` for a sum of terms each of which is smooth enough for tilting or a multiple of one
    /// kinked function, by a factor free of the states.
    pub(super) fn expectation(&self, formula: Expr) -> Option<Expr> {
        let pool = self.pool();
        let terms = summands(pool, pool.expand(formula))
            .into_iter()
            .map(|term| {
                self.smooth(term).or_else(|| {
                    let (fixed, moving): (Vec<Expr>, Vec<Expr>) = factors(pool, term)
                        .into_iter()
                        .partition(|&f| !self.moves(f));
                    let [kinked] = moving[..] else { return None };
                    Some(pool.mul(pool.product(fixed), self.call(kinked)?))
                })
            });
        Some(pool.sum(terms.collect::<Option<Vec<Expr>>>()?))
    }

    fn pool(&self) -> &Pool {
        &self.model.pool
    }

    /// Whether a state occurs.
    fn moves(&self, e: Expr) -> bool {
        self.pool()
            .symbols_of(e)
            .into_iter()
            .any(|s| self.model.state_of(s).is_some())
    }

    fn smooth(&self, e: Expr) -> Option<Expr> {
        let read = Tilted::read(self.model, self.gaussian, e)?;
        Some(read.expectation(self.pool(), self.gaussian))
    }

    fn call(&self, e: Expr) -> Option<Expr> {
        let pool = self.pool();
        let Node::Call(function, arguments) = &*pool.node(e) else {
            return None;
        };
        match (function, &**arguments) {
            (Function::Max, &[a, b]) => {
                Some(pool.add(self.expectation(b)?, self.positive_part(pool.sub(a, b))?))
            }
            (Function::Min, &[a, b]) => {
                Some(pool.sub(self.expectation(a)?, self.positive_part(pool.sub(a, b))?))
            }
            (Function::Abs, &[d]) => {
                let twice = pool.mul(pool.int(2), self.positive_part(d)?);
                Some(pool.sub(twice, self.expectation(d)?))
            }
            (Function::Sign, &[d]) => {
                let above = pool.mul(pool.int(2), self.probability(d)?);
                Some(pool.sub(above, pool.one()))
            }
            (Function::NormalCdf, &[d]) => {
                let (mean, variance) = self.affine(d)?;
                let spread = pool.sqrt(pool.add(pool.one(), variance));
                Some(self.cdf(pool.div(mean, spread)))
            }
            _ => None,
        }
    }

    fn cdf(&self, x: Expr) -> Expr {
        self.pool().call(Function::NormalCdf, &[x])
    }

    /// Mean and variance of an affine function of the coordinates that is random.
    fn affine(&self, d: Expr) -> Option<(Expr, Expr)> {
        let pool = self.pool();
        let (constant, slopes) = Tilted::read(self.model, self.gaussian, d)?.affine(pool)?;
        let mean = pool.add(constant, self.linear_mean(&slopes));
        self.is_random(&slopes)
            .then(|| (mean, self.bilinear(&slopes, &slopes)))
    }

    /// `E[d^+]`.
    fn positive_part(&self, d: Expr) -> Option<Expr> {
        let pool = self.pool();
        if let Some((mean, variance)) = self.affine(d) {
            let deviation = pool.sqrt(variance);
            let z = pool.div(mean, deviation);
            let density = pool.call(Function::NormalPdf, &[z]);
            return Some(pool.add(pool.mul(mean, self.cdf(z)), pool.mul(deviation, density)));
        }
        let pair = self.exponentials(d)?;
        let gain = |side: &Exponential| {
            let mean = self.exponential_mean(side);
            pool.mul(mean, self.tilted_probability(&pair, Some(&side.slopes)))
        };
        Some(pool.sub(gain(&pair.plus), gain(&pair.minus)))
    }

    /// `P(d > 0)`.
    fn probability(&self, d: Expr) -> Option<Expr> {
        let pool = self.pool();
        if let Some((mean, variance)) = self.affine(d) {
            return Some(self.cdf(pool.div(mean, pool.sqrt(variance))));
        }
        let pair = self.exponentials(d)?;
        Some(self.tilted_probability(&pair, None))
    }

    /// `P(plus > minus)` under the measure tilted by `exp(slopes . u)`: with `z` the difference of the
    /// exponents, `z > log(minus/plus)`.
    fn tilted_probability(&self, pair: &Pair, slopes: Option<&Slopes>) -> Expr {
        let pool = self.pool();
        let variance = self.bilinear(&pair.difference, &pair.difference);
        let mut mean = self.linear_mean(&pair.difference);
        if let Some(slopes) = slopes {
            mean = pool.add(mean, self.bilinear(&pair.difference, slopes));
        }
        let ahead = pool.sub(pool.log(pair.plus.factor), pool.log(pair.minus.factor));
        self.cdf(pool.div(pool.add(mean, ahead), pool.sqrt(variance)))
    }

    /// `factor * exp(l.m + l'P l/2)`.
    fn exponential_mean(&self, side: &Exponential) -> Expr {
        let pool = self.pool();
        let half = pool.mul(pool.ratio(1, 2), self.bilinear(&side.slopes, &side.slopes));
        let exponent = pool.add(self.linear_mean(&side.slopes), half);
        pool.mul(side.factor, pool.exp(exponent))
    }

    /// Reads `d` as the difference of two positive multiples of exponentials.
    fn exponentials(&self, d: Expr) -> Option<Pair> {
        let pool = self.pool();
        let read = Tilted::read(self.model, self.gaussian, d)?;
        let mut collected: Vec<Exponential> = Vec::new();
        for term in read.terms {
            if !term.powers.is_empty() {
                return None;
            }
            match collected
                .iter_mut()
                .find(|known| known.slopes == term.slopes)
            {
                Some(known) => known.factor = pool.add(known.factor, term.coefficient),
                None => collected.push(Exponential {
                    factor: term.coefficient,
                    slopes: term.slopes,
                }),
            }
        }
        for side in &mut collected {
            side.factor = pool.simplify(side.factor);
        }
        let [a, b]: [Exponential; 2] = collected.try_into().ok()?;
        let sign = |side: &Exponential| pool.sign(side.factor);
        let (plus, mut minus) = match (sign(&a).is_positive(), sign(&b).is_positive()) {
            (true, false) => (a, b),
            (false, true) => (b, a),
            _ => return None,
        };
        minus.factor = pool.neg(minus.factor);
        if !pool.sign(minus.factor).is_positive() {
            return None;
        }
        let mut difference = plus.slopes.clone();
        for (&row, &slope) in &minus.slopes {
            let known = difference.entry(row).or_insert_with(|| pool.zero());
            *known = pool.sub(*known, slope);
        }
        difference.retain(|_, slope| !pool.is_zero_literal(*slope));
        self.is_random(&difference).then_some(Pair {
            plus,
            minus,
            difference,
        })
    }

    fn is_random(&self, slopes: &Slopes) -> bool {
        slopes
            .keys()
            .any(|&row| !self.gaussian.is_deterministic(self.pool(), row))
    }

    fn linear_mean(&self, slopes: &Slopes) -> Expr {
        let pool = self.pool();
        let mean = |row: usize| pool.var(mean_symbol(pool, &self.gaussian.rows[row]));
        pool.sum(
            slopes
                .iter()
                .map(|(&row, &s)| pool.mul(s, mean(row)))
                .collect::<Vec<_>>(),
        )
    }

    /// `a' P b`.
    fn bilinear(&self, a: &Slopes, b: &Slopes) -> Expr {
        let pool = self.pool();
        let covariance = |i: usize, j: usize| {
            let rows = &self.gaussian.rows;
            pool.var(covariance_symbol(pool, &rows[i.min(j)], &rows[i.max(j)]))
        };
        let terms = a.iter().flat_map(|(&i, &s)| {
            b.iter()
                .map(move |(&j, &r)| pool.product([s, r, covariance(i, j)]))
        });
        pool.sum(terms.collect::<Vec<_>>())
    }
}

type Slopes = BTreeMap<usize, Expr>;

/// `factor * exp(slopes . u)`.
struct Exponential {
    factor: Expr,
    slopes: Slopes,
}

/// `plus - minus`, both positive, with the difference of their exponents' slopes.
struct Pair {
    plus: Exponential,
    minus: Exponential,
    difference: Slopes,
}
