//! The scalar linear equation with an exponential polynomial as forcing.

use super::{ExpPoly, Term, Wave};
use crate::symbolic::{Expr, Pool, Truth};

impl ExpPoly {
    /// The solution of `y' = rate y + forcing`, `y(0) = initial`, by variation of constants.
    ///
    /// None where it cannot be told whether a rate of the forcing equals `rate`, or a frequency zero.
    /// Where two rates are different formulas, the result divides by their difference: it holds for all
    /// parameters but those at which they coincide, and there by continuity.
    pub(in crate::analysis::moments) fn solve(
        pool: &Pool,
        rate: Expr,
        forcing: &Self,
        initial: Expr,
    ) -> Option<Self> {
        let rate = pool.simplify(rate);
        let mut result = Self::default();
        result.push_response(pool, rate, initial);
        for &term in &forcing.terms {
            result.add_response(pool, rate, term)?;
        }
        Some(result)
    }

    /// Adds `coefficient * exp(rate t)`.
    fn push_response(&mut self, pool: &Pool, rate: Expr, coefficient: Expr) {
        let term = Term::constant(pool, coefficient);
        self.push(pool, Term { rate, ..term });
    }

    /// Adds the response `exp(a t) int_0^t exp(-a s) c s^n exp(lambda s) wave(s) ds` to one term.
    fn add_response(&mut self, pool: &Pool, a: Expr, term: Term) -> Option<()> {
        let mu = pool.simplify(pool.sub(term.rate, a));
        let none = pool.zero();
        match term.wave {
            Wave::None => match pool.is_zero(mu) {
                Truth::Yes => self.add_resonant(pool, a, term),
                Truth::No(_) => self.add_distinct(pool, a, mu, term),
                Truth::CannotTell => return None,
            },
            Wave::Cos(omega) => {
                self.add_wave(pool, a, [mu, omega], term, [term.coefficient, none])?
            }
            Wave::Sin(omega) => {
                self.add_wave(pool, a, [mu, omega], term, [none, term.coefficient])?
            }
        }
        Some(())
    }

    /// As above where the forcing has the equation's own rate.
    fn add_resonant(&mut self, pool: &Pool, a: Expr, term: Term) {
        let power = term.power + 1;
        let coefficient = pool.div(term.coefficient, pool.int(i64::from(power)));
        self.push(
            pool,
            Term {
                rate: a,
                power,
                coefficient,
                ..term
            },
        );
    }

    /// As above for `mu = lambda - a` other than zero:
    /// `int_0^t s^n exp(mu s) ds = [exp(mu s) sum_k (-1)^k n!/(n-k)! s^(n-k)/mu^(k+1)]_0^t`.
    fn add_distinct(&mut self, pool: &Pool, a: Expr, mu: Expr, term: Term) {
        let mut coefficient = pool.div(term.coefficient, mu);
        for power in (0..=term.power).rev() {
            self.push(
                pool,
                Term {
                    power,
                    coefficient,
                    ..term
                },
            );
            if power == 0 {
                self.push_response(pool, a, pool.neg(coefficient));
            }
            let step = pool.div(pool.int(-i64::from(power)), mu);
            coefficient = pool.mul(coefficient, step);
        }
    }

    /// As above for `s^n exp(mu s) (p cos(omega s) + q sin(omega s))` with a frequency other than zero,
    /// by parts: with `D = mu^2 + omega^2`, `exp(mu s) (p' cos + q' sin)` for `p' = (p mu - q omega)/D`,
    /// `q' = (p omega + q mu)/D` is the integral for n = 0 (Abramowitz and Stegun 1964, 4.3.136-137).
    fn add_wave(
        &mut self,
        pool: &Pool,
        a: Expr,
        [mu, omega]: [Expr; 2],
        term: Term,
        [mut p, mut q]: [Expr; 2],
    ) -> Option<()> {
        if !matches!(pool.is_zero(omega), Truth::No(_)) {
            return None;
        }
        let scale = pool.add(pool.square(mu), pool.square(omega));
        let times = |x: Expr, y: Expr| pool.mul(x, y);
        for power in (0..=term.power).rev() {
            let cos = pool.div(pool.sub(times(p, mu), times(q, omega)), scale);
            let sin = pool.div(pool.add(times(p, omega), times(q, mu)), scale);
            for (wave, coefficient) in [(Wave::Cos(omega), cos), (Wave::Sin(omega), sin)] {
                self.push(
                    pool,
                    Term {
                        power,
                        wave,
                        coefficient,
                        ..term
                    },
                );
            }
            if power == 0 {
                self.push_response(pool, a, pool.neg(cos));
            }
            let down = pool.int(-i64::from(power));
            (p, q) = (times(down, cos), times(down, sin));
        }
        Some(())
    }
}
