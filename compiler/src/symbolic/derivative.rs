//! Derivatives.

use super::function::Function;
use super::node::{Expr, Node, Rational, Symbol};
use super::pool::Pool;

impl Pool {
    /// The partial derivative with respect to a symbol. `abs`, `min`, `max` and `sign` differentiate
    /// piece by piece, away from their kinks: ask [`Pool::has_kink`] first.
    pub fn derivative(&self, e: Expr, x: Symbol) -> Expr {
        let open = |part: Expr| {
            self.depends_on(part, x) && !self.inner.borrow().derivatives.contains_key(&(part, x))
        };
        for part in self.postorder_where(e, open) {
            let result = self.node_derivative(part, x);
            self.inner
                .borrow_mut()
                .derivatives
                .insert((part, x), result);
        }
        self.known_derivative(e, x)
    }

    /// The derivative of a part all of whose dependent parts have been differentiated.
    fn known_derivative(&self, e: Expr, x: Symbol) -> Expr {
        let known = self.inner.borrow().derivatives.get(&(e, x)).copied();
        known.unwrap_or_else(|| self.zero())
    }

    fn node_derivative(&self, e: Expr, x: Symbol) -> Expr {
        let d = |part| self.known_derivative(part, x);
        match &*self.node(e) {
            Node::Number(_) | Node::Pi => self.zero(),
            Node::Symbol(_) => self.one(),
            Node::Sum(terms) => self.sum(terms.iter().map(|&t| d(t))),
            Node::Product(factors) => {
                let inner = (0..factors.len()).filter(|&i| self.depends_on(factors[i], x));
                self.sum(inner.map(|i| {
                    let others = factors
                        .iter()
                        .enumerate()
                        .filter(|&(j, _)| j != i)
                        .map(|(_, &f)| f);
                    self.product(others.chain([d(factors[i])]))
                }))
            }
            Node::Power(base, exponent) => {
                if self.as_number(*base).is_some_and(|b| b <= Rational::ZERO) {
                    // 0 is constant inside of where its power has a value; that of a negative number has
                    // one only where the exponent stays at a whole number. Its logarithm has none.
                    return self.zero();
                }
                // (b^p)' = p b^(p-1) b' + log(b) b^p p'
                let lowered = self.pow(*base, self.sub(*exponent, self.one()));
                let mut terms = vec![self.product([*exponent, lowered, d(*base)])];
                if self.depends_on(*exponent, x) {
                    terms.push(self.product([self.log(*base), e, d(*exponent)]));
                }
                self.sum(terms)
            }
            Node::Call(function, arguments) => self.sum(
                arguments
                    .iter()
                    .enumerate()
                    .filter(|&(_, &a)| self.depends_on(a, x))
                    .map(|(i, &a)| {
                        self.mul(self.function_derivative(*function, arguments, i, e), d(a))
                    }),
            ),
        }
    }

    /// The partial derivative of a function by its argument number `index`; `whole` is the call.
    fn function_derivative(
        &self,
        function: Function,
        arguments: &[Expr],
        index: usize,
        whole: Expr,
    ) -> Expr {
        use Function::*;
        let a = arguments[0];
        let one = self.one();
        let one_minus_square = || self.sub(one, self.square(a));
        match function {
            Exp => whole,
            Log => self.div(one, a),
            Sqrt => self.div(self.ratio(1, 2), whole),
            Sin => self.call(Cos, &[a]),
            Cos => self.neg(self.call(Sin, &[a])),
            Tan => self.add(one, self.square(whole)),
            Asin => self.pow(one_minus_square(), self.ratio(-1, 2)),
            Acos => self.neg(self.pow(one_minus_square(), self.ratio(-1, 2))),
            Atan => self.div(one, self.add(one, self.square(a))),
            Sinh => self.call(Cosh, &[a]),
            Cosh => self.call(Sinh, &[a]),
            Tanh => self.sub(one, self.square(whole)),
            Asinh => self.pow(self.add(self.square(a), one), self.ratio(-1, 2)),
            Acosh => {
                // 1/sqrt((a - 1)(a + 1)), for a > 1
                self.pow(self.sub(self.square(a), one), self.ratio(-1, 2))
            }
            Atanh => self.div(one, one_minus_square()),
            Cbrt => self.div(self.ratio(1, 3), self.square(whole)),
            Erf => {
                let density = self.exp(self.neg(self.square(a)));
                self.product([self.int(2), density, self.pow(self.pi(), self.ratio(-1, 2))])
            }
            NormalCdf => self.call(NormalPdf, &[a]),
            NormalPdf => self.product([self.int(-1), a, whole]),
            NormalQuantile => self.div(one, self.call(NormalPdf, &[whole])),
            Abs => self.call(Sign, &[a]),
            Sign => self.zero(),
            Min | Max => self.choice_derivative(function, arguments, index),
            // ((e^a - 1)/a)' = (e^a - (e^a - 1)/a)/a
            Expm1Ratio => self.div(self.sub(self.exp(a), whole), a),
        }
    }

    /// The slope of `min` or `max` by one argument: 1 where that argument is chosen, 0 elsewhere.
    fn choice_derivative(&self, function: Function, arguments: &[Expr], index: usize) -> Expr {
        let (own, other) = (arguments[index], arguments[1 - index]);
        let ahead = match function {
            Function::Max => self.sub(own, other),
            _ => self.sub(other, own),
        };
        let half = self.ratio(1, 2);
        self.add(half, self.mul(half, self.call(Function::Sign, &[ahead])))
    }
}
