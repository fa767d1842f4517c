//! Hyperbolic functions as exponentials.

use super::Sign;
use super::function::Function;
use super::limit::Limit;
use super::node::{Expr, Node};
use super::pool::{Pool, Table};

impl Pool {
    /// As [`Pool::sign`], of the formula in exponentials over a common denominator: the signs of differences of
    /// hyperbolic functions can often be seen only there.
    ///
    /// ```
    /// use driftwright::front::formula::parse_in_pool;
    /// use driftwright::symbolic::{Pool, SymbolKind};
    /// let pool = Pool::new();
    /// pool.symbol("x", SymbolKind::State);
    /// let slope = parse_in_pool(&pool, "1 - tanh(x)^2").unwrap();
    /// assert!(pool.sign_in_exponentials(slope).is_positive());
    /// ```
    pub fn sign_in_exponentials(&self, e: Expr) -> Sign {
        let written = self.in_exponentials(e);
        let plain = self.sign(written);
        if plain != Sign::Unknown || self.is_heavy(written) {
            return plain;
        }
        let shapes = self.shapes(written, Limit::Simplification.amount());
        let mut signs = shapes.into_iter().map(|shape| self.sign(shape));
        signs.find(|&sign| sign != Sign::Unknown).unwrap_or(plain)
    }

    /// The formula with its hyperbolic functions written as exponentials, simplified.
    pub fn in_exponentials(&self, e: Expr) -> Expr {
        let mut done: Table<Expr, Expr> = Table::default();
        for part in self.postorder(e) {
            let image = |child: Expr| done.get(&child).copied().unwrap_or(child);
            let node = self.node(part);
            let written = match &*node {
                Node::Call(function, arguments) => self.hyperbolic(*function, image(arguments[0])),
                _ => None,
            };
            let written = written.unwrap_or_else(|| self.rebuild(&node, image));
            done.insert(part, written);
        }
        self.simplify(done[&e])
    }

    /// A hyperbolic function of `x` in exponentials; none for other functions.
    pub(super) fn hyperbolic(&self, function: Function, x: Expr) -> Option<Expr> {
        let exp = |n: i64| self.exp(self.mul(self.int(n), x));
        let (one, half) = (self.one(), self.ratio(1, 2));
        match function {
            Function::Sinh => Some(self.mul(half, self.sub(exp(1), exp(-1)))),
            Function::Cosh => Some(self.mul(half, self.add(exp(1), exp(-1)))),
            Function::Tanh => Some(self.div(self.sub(exp(2), one), self.add(exp(2), one))),
            _ => None,
        }
    }
}
