//! Replacement of symbols by formulas.

use std::collections::BTreeMap;

use super::node::{Expr, Node, Symbol};
use super::pool::{Pool, Table};

impl Pool {
    /// The formula with each symbol in `values` replaced, all at once.
    pub fn substitute(&self, e: Expr, values: &BTreeMap<Symbol, Expr>) -> Expr {
        let touched = |part: Expr| {
            self.symbol_set(part)
                .iter()
                .any(|symbol| values.contains_key(symbol))
        };
        let mut done: Table<Expr, Expr> = Table::default();
        for part in self.postorder_where(e, touched) {
            let image = match &*self.node(part) {
                Node::Symbol(symbol) => values[symbol],
                node => self.rebuild(node, |child| done.get(&child).copied().unwrap_or(child)),
            };
            done.insert(part, image);
        }
        done.get(&e).copied().unwrap_or(e)
    }

    /// The node made again from the images of its operands, through the constructors.
    pub(super) fn rebuild(&self, node: &Node, image: impl Fn(Expr) -> Expr) -> Expr {
        match node {
            Node::Number(_) | Node::Pi | Node::Symbol(_) => self.intern(node.clone()),
            Node::Sum(terms) => self.sum(terms.iter().map(|&t| image(t))),
            Node::Product(factors) => self.product(factors.iter().map(|&f| image(f))),
            Node::Power(base, exponent) => self.pow(image(*base), image(*exponent)),
            Node::Call(function, arguments) => {
                let arguments: Vec<Expr> = arguments.iter().map(|&a| image(a)).collect();
                self.call(*function, &arguments)
            }
        }
    }
}
