//! Proofs by undoing a function: `log(z) = b` holds if `z = exp(b)`, `asin(z) = b` if `z = sin(b)` and b
//! lies between -pi/2 and pi/2, `sqrt(z) = b` if `z = b^2` and b is not negative.
//!
//! The normal form takes inverse functions and roots of sums as they stand, so relations between
//! several of them escape it. After one has been undone it can decide.

use super::enclosure::Enclosure;
use super::function::Function;
use super::node::{Expr, Node, Rational};
use super::pool::Pool;

/// Parts of an equation that are tried, for each round that is left.
const MAX_CANDIDATES: usize = 3;

/// Distinct nodes of an equation beyond which this is not tried.
const MAX_SIZE: usize = 300;

/// Functions that may be undone one after the other.
const MAX_ROUNDS: usize = 2;

/// Depth to which signs are looked for.
const SIGN_BUDGET: usize = 4;

impl Pool {
    /// Whether two formulas agree wherever both have a value, proved by undoing a function on one side
    /// of the equation.
    pub(super) fn equal_by_undoing(&self, a: Expr, b: Expr) -> bool {
        self.undoes(a, b, MAX_ROUNDS)
    }

    fn undoes(&self, a: Expr, b: Expr, rounds: usize) -> bool {
        let difference = self.expand(self.sub(a, b));
        if rounds == 0 || self.size(difference) > MAX_SIZE {
            return false;
        }
        let terms = match &*self.node(difference) {
            Node::Sum(terms) => terms.to_vec(),
            _ => vec![difference],
        };
        // What a formula jumps at need not hold where a factor vanishes.
        let smooth = self.has_kink(difference).is_none();
        let mut tried = 0;
        for (i, &term) in terms.iter().enumerate() {
            let factors = match &*self.node(term) {
                Node::Product(factors) => factors.to_vec(),
                _ => vec![term],
            };
            for (j, &factor) in factors.iter().enumerate() {
                if !self.can_be_undone(factor) {
                    continue;
                }
                let others = self.product(without(&factors, j));
                if !smooth && self.as_number(others).is_none() {
                    continue;
                }
                // others*factor + rest = 0
                let rest = self.sum(without(&terms, i));
                let value = self.neg(self.div(rest, others));
                if self.holds_undone(factor, value, rounds) {
                    return true;
                }
                tried += 1;
                if tried == MAX_CANDIDATES * rounds {
                    return false;
                }
            }
        }
        false
    }

    fn can_be_undone(&self, e: Expr) -> bool {
        use Function::*;
        match &*self.node(e) {
            Node::Power(_, exponent) => self.as_number(*exponent).is_some_and(|n| !n.is_int()),
            Node::Call(f, _) => matches!(
                f,
                Exp | Log
                    | Asin
                    | Acos
                    | Atan
                    | Sinh
                    | Tanh
                    | Asinh
                    | Acosh
                    | Atanh
                    | Cbrt
                    | Erf
                    | NormalCdf
                    | NormalQuantile
            ),
            _ => false,
        }
    }

    /// Whether `inverse = value` is proved with the inverse function or root undone.
    fn holds_undone(&self, inverse: Expr, value: Expr, rounds: usize) -> bool {
        let Some((argument, undone)) = self.undone(inverse, value) else {
            return false;
        };
        self.equal_by_algebra(argument, undone) || self.undoes(argument, undone, rounds - 1)
    }

    /// The argument of a function or the base of a root, and what it is if the whole has that value;
    /// none unless the one follows from the other for every value that can occur.
    fn undone(&self, e: Expr, value: Expr) -> Option<(Expr, Expr)> {
        use Function::*;
        let sign = || self.bounded_sign(value, SIGN_BUDGET);
        let lies = |allowed: Enclosure| self.enclosure(value, SIGN_BUDGET).is_within(&allowed);
        let call = |f: Function| self.call(f, &[value]);
        let (function, argument) = match &*self.node(e) {
            Node::Call(function, arguments) => (*function, arguments[0]),
            Node::Power(base, exponent) => {
                let n = self.as_number(*exponent)?;
                let fits = if n < Rational::ZERO {
                    sign().is_positive()
                } else {
                    sign().is_non_negative()
                };
                let inverse = self.number(Rational::ONE / n);
                return fits.then(|| (*base, self.pow(value, inverse)));
            }
            _ => return None,
        };
        let (fits, undone) = match function {
            Log => (true, call(Exp)),
            Asinh => (true, call(Sinh)),
            Atanh => (true, call(Tanh)),
            Sinh => (true, call(Asinh)),
            NormalQuantile => (true, call(NormalCdf)),
            Cbrt => (true, self.pow(value, self.int(3))),
            Acosh => (sign().is_non_negative(), call(Cosh)),
            Asin => (lies(Enclosure::within_turns(1, 2, false)), call(Sin)),
            Atan => (lies(Enclosure::within_turns(1, 2, true)), call(Tan)),
            Acos => (lies(Enclosure::half_turn()), call(Cos)),
            Exp => (sign().is_positive(), call(Log)),
            Tanh => (lies(Enclosure::open(-1, 1)), call(Atanh)),
            NormalCdf => (lies(Enclosure::open(0, 1)), call(NormalQuantile)),
            Erf => (
                lies(Enclosure::open(-1, 1)),
                self.inverse_error_function(value),
            ),
            _ => return None,
        };
        fits.then_some((argument, undone))
    }

    /// `erf(x) = 2*normal_cdf(sqrt(2)*x) - 1`, solved for x.
    fn inverse_error_function(&self, value: Expr) -> Expr {
        let half = self.ratio(1, 2);
        let level = self.mul(half, self.add(self.one(), value));
        let quantile = self.call(Function::NormalQuantile, &[level]);
        self.mul(self.sqrt(half), quantile)
    }
}

/// The items but one.
fn without(items: &[Expr], index: usize) -> impl Iterator<Item = Expr> + '_ {
    let others = items.iter().enumerate().filter(move |&(i, _)| i != index);
    others.map(|(_, &item)| item)
}
