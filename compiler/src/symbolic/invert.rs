//! Inverse functions: `forward(x) = u` solved for x.

use std::collections::BTreeMap;

use dashu_base::BitTest;

use super::function::Function;
use super::node::{Expr, Node, Rational, Symbol};
use super::normal::OneKernel;
use super::pool::Pool;

/// Layers that are peeled off before giving up.
const MAX_LAYERS: usize = 64;

impl Pool {
    /// The formula in `u` that gives back `x` from `u = forward(x)`, for x in its range; none if none
    /// was found that can be proved to.
    ///
    /// ```
    /// use driftwright::symbolic::{Bound, Interval, Pool, SymbolKind};
    /// let pool = Pool::new();
    /// let x = pool.symbol("x", SymbolKind::State);
    /// let u = pool.symbol("u", SymbolKind::Auxiliary);
    /// let unit = Interval { lower: Bound::Open(pool.zero()), upper: Bound::Open(pool.one()) };
    /// pool.set_range(x, unit);
    /// let logit = pool.log(pool.div(pool.var(x), pool.sub(pool.one(), pool.var(x))));
    /// assert_eq!(pool.format(pool.invert(logit, x, u).unwrap()), "exp(u)/(exp(u) + 1)");
    /// ```
    pub fn invert(&self, forward: Expr, x: Symbol, u: Symbol) -> Option<Expr> {
        let (mut left, mut right) = (forward, self.var(u));
        for _ in 0..MAX_LAYERS {
            if left == self.var(x) {
                let inverse = self.simplify(right);
                return self.is_inverse(forward, inverse, x, u).then_some(inverse);
            }
            (left, right) = self
                .peel(left, right, x)
                .or_else(|| self.solve(left, right, x, u))?;
        }
        None
    }

    /// Whether `inverse(forward(x)) = x` is proved, or `forward(inverse(u)) = u`; branches have been
    /// chosen by range, so the second says as much.
    fn is_inverse(&self, forward: Expr, inverse: Expr, x: Symbol, u: Symbol) -> bool {
        let there_and_back = self.substitute(inverse, &BTreeMap::from([(u, forward)]));
        if self.equal(there_and_back, self.var(x)).is_yes() {
            return true;
        }
        let back_and_there = self.substitute(forward, &BTreeMap::from([(x, inverse)]));
        self.equal(back_and_there, self.var(u)).is_yes()
    }

    /// Takes one operation off the left side of `left = right` and undoes it on the right.
    fn peel(&self, left: Expr, right: Expr, x: Symbol) -> Option<(Expr, Expr)> {
        match &*self.node(left) {
            Node::Sum(terms) => {
                let (inside, outside) = self.parted(terms, x);
                let [single] = inside[..] else { return None };
                Some((single, self.sub(right, self.sum(outside))))
            }
            Node::Product(factors) => {
                let (inside, outside) = self.parted(factors, x);
                let [single] = inside[..] else { return None };
                Some((single, self.div(right, self.product(outside))))
            }
            Node::Power(base, exponent) if !self.depends_on(*base, x) => {
                Some((*exponent, self.div(self.log(right), self.log(*base))))
            }
            Node::Power(base, exponent) if !self.depends_on(*exponent, x) => {
                Some((*base, self.root(*base, *exponent, right)?))
            }
            Node::Call(function, arguments) if arguments.len() == 1 => {
                Some((arguments[0], self.undo(*function, arguments[0], right)?))
            }
            _ => None,
        }
    }

    fn parted(&self, items: &[Expr], x: Symbol) -> (Vec<Expr>, Vec<Expr>) {
        items.iter().partition(|&&item| self.depends_on(item, x))
    }

    /// `base` from `base^exponent = right`, by the sign of the base.
    fn root(&self, base: Expr, exponent: Expr, right: Expr) -> Option<Expr> {
        let inverse = self.pow(right, self.div(self.one(), exponent));
        let sign = self.sign(base);
        match self.as_number(exponent) {
            Some(n) if n.is_int() && !sign.is_non_negative() => {
                let even = !n.numerator().bit(0);
                if n == Rational::from(-1) {
                    Some(inverse)
                } else if n == Rational::from(3) {
                    Some(self.call(Function::Cbrt, &[right]))
                } else {
                    (even && sign.is_non_positive()).then(|| self.neg(inverse))
                }
            }
            // A broken or symbolic power has a value for a positive base only.
            _ => Some(inverse),
        }
    }

    /// `argument` from `function(argument) = right`.
    fn undo(&self, function: Function, argument: Expr, right: Expr) -> Option<Expr> {
        use Function::*;
        let call = |f| self.call(f, &[right]);
        let half_pi = self.mul(self.ratio(1, 2), self.pi());
        let between = |lower: Expr, upper: Expr| {
            let above = self.sign(self.sub(argument, lower)).is_non_negative();
            above && self.sign(self.sub(upper, argument)).is_non_negative()
        };
        Some(match function {
            Exp => self.log(right),
            Log => self.exp(right),
            Sqrt => self.square(right),
            Cbrt => self.pow(right, self.int(3)),
            Sinh => call(Asinh),
            Tanh => call(Atanh),
            Asinh => call(Sinh),
            Atanh => call(Tanh),
            Acosh => call(Cosh),
            Asin => call(Sin),
            Acos => call(Cos),
            Atan => call(Tan),
            NormalCdf => call(NormalQuantile),
            NormalQuantile => call(NormalCdf),
            Erf => {
                let half = self.mul(self.ratio(1, 2), self.add(right, self.one()));
                self.div(self.call(NormalQuantile, &[half]), self.sqrt(self.int(2)))
            }
            Cosh if self.sign(argument).is_non_negative() => call(Acosh),
            Sin if between(self.neg(half_pi), half_pi) => call(Asin),
            Cos if between(self.zero(), self.pi()) => call(Acos),
            Tan if between(self.neg(half_pi), half_pi) => call(Atan),
            _ => return None,
        })
    }

    /// Solves for the one kernel the left side is a Moebius transform of, or a quadratic polynomial in.
    fn solve(&self, left: Expr, right: Expr, x: Symbol, u: Symbol) -> Option<(Expr, Expr)> {
        let OneKernel {
            kernel,
            numerator,
            denominator,
        } = self.in_one_kernel(left, x)?;
        if kernel == left {
            return None;
        }
        let lowest = *numerator.keys().chain(denominator.keys()).min()?;
        let highest = numerator.keys().chain(denominator.keys()).max()? - lowest;
        let coefficient = |side: &BTreeMap<i64, Expr>, power: i64| {
            side.get(&(power + lowest))
                .copied()
                .unwrap_or_else(|| self.zero())
        };
        // numerator - u*denominator = a k^2 + b k + c = 0, with u for the right side.
        let [c, b, a] = [0, 1, 2].map(|power| {
            let scaled = self.mul(self.var(u), coefficient(&denominator, power));
            self.sub(coefficient(&numerator, power), scaled)
        });
        let root = match highest {
            1 => self.neg(self.div(c, b)),
            2 => self.quadratic_root(kernel, [a, b, c], left, u)?,
            _ => return None,
        };
        Some((kernel, self.substitute(root, &BTreeMap::from([(u, right)]))))
    }

    /// The root of `a k^2 + b k + c = 0` on the branch that the sign of `2 a k + b` tells, where `u`
    /// stands for `left`.
    fn quadratic_root(
        &self,
        kernel: Expr,
        [a, b, c]: [Expr; 3],
        left: Expr,
        u: Symbol,
    ) -> Option<Expr> {
        let slope = self.sum([self.product([self.int(2), a, kernel]), b]);
        let slope = self.simplify(self.substitute(slope, &BTreeMap::from([(u, left)])));
        let sign = self.sign(slope);
        let branch = if sign.is_non_negative() {
            1
        } else if sign.is_non_positive() {
            -1
        } else {
            return None;
        };
        let discriminant = self.sub(self.square(b), self.product([self.int(4), a, c]));
        let root = self.mul(self.int(branch), self.sqrt(discriminant));
        Some(self.div(self.sub(root, b), self.mul(self.int(2), a)))
    }
}
