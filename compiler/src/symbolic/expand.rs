//! Expansion of products and whole powers of sums.

use std::collections::HashMap;

use super::node::{Expr, Node, Rational};
use super::pool::Pool;

/// A product that would have more terms than this stays a product.
const MAX_TERMS: usize = 2_000;

impl Pool {
    /// The formula with products of sums multiplied out, up to a budget of terms: what would grow
    /// beyond it stays as it is.
    pub fn expand(&self, e: Expr) -> Expr {
        let mut done: HashMap<Expr, Expr> = HashMap::new();
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
        (left.len().saturating_mul(right.len()) <= MAX_TERMS).then(|| {
            self.sum(
                left.iter()
                    .flat_map(|&l| right.iter().map(move |&r| (l, r)))
                    .map(|(l, r)| self.mul(l, r)),
            )
        })
    }
}
