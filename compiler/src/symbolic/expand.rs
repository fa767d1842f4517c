//! Expansion of products and whole powers of sums.

use super::limit::Limit;
use super::node::{Expr, Node, Rational};
use super::pool::{Pool, Table};

impl Pool {
    /// The formula with products of sums multiplied out, up to a budget of terms: what would grow
    /// beyond it stays as it is.
    pub fn expand(&self, e: Expr) -> Expr {
        let mut done: Table<Expr, Expr> = Table::default();
        for part in self.postorder(e) {
            let rebuilt = self.rebuild(&self.node(part), |child| done[&child]);
            let image = self.expand_node(rebuilt);
            done.insert(part, image);
        }
        done[&e]
    }

    /// Multiplies out one node whose operands are expanded.
    fn expand_node(&self, e: Expr) -> Expr {
        match &*self.node(e) {
            Node::Product(factors) => factors
                .iter()
                .try_fold(self.one(), |product, &f| {
                    self.multiply_out(product, self.expand_node(f))
                })
                .unwrap_or(e),
            Node::Power(base, exponent) => {
                let Some(n) = self
                    .as_number(*exponent)
                    .filter(|n| n.is_int() && *n > Rational::ONE)
                else {
                    return e;
                };
                let n: u32 = n.numerator().try_into().unwrap_or(u32::MAX);
                if n > 64 || !matches!(&*self.node(*base), Node::Sum(_)) {
                    return e;
                }
                (0..n)
                    .try_fold(self.one(), |product, _| self.multiply_out(product, *base))
                    .unwrap_or(e)
            }
            _ => e,
        }
    }

    fn multiply_out(&self, a: Expr, b: Expr) -> Option<Expr> {
        let terms = |e: Expr| match &*self.node(e) {
            Node::Sum(terms) => terms.to_vec(),
            _ => vec![e],
        };
        let (left, right) = (terms(a), terms(b));
        let pairs = left.len().saturating_mul(right.len());
        if pairs as u64 > Limit::Expansion.amount() {
            self.exceed(Limit::Expansion);
            return None;
        }
        Some(
            self.sum(
                left.iter()
                    .flat_map(|&l| right.iter().map(move |&r| (l, r)))
                    .map(|(l, r)| self.mul(l, r)),
            ),
        )
    }
}
