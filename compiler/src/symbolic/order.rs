//! The structural order of terms and factors, which does not depend on when they were made.
//!
//! Terms of a sum ascend: constants, parameters, time, states; lower degrees first; then names.
//! Factors likewise, without the degree. Because equal structure is equal handle, a comparison walks
//! down one path only.

use std::cmp::Ordering;

use super::node::{Expr, Node};
use super::pool::{Inner, Pool};

impl Pool {
    /// Sorts terms of a sum into their order.
    pub(super) fn sort_terms(&self, terms: &mut [Expr]) {
        let inner = self.inner.borrow();
        terms.sort_by(|&a, &b| inner.compare_terms(a, b));
    }

    /// Sorts factors of a product into their order.
    pub(super) fn sort_factors(&self, factors: &mut [Expr]) {
        let inner = self.inner.borrow();
        factors.sort_by(|&a, &b| inner.compare_factors(a, b));
    }
}

impl Inner {
    /// The order of terms in a sum; numeric coefficients count last.
    fn compare_terms(&self, a: Expr, b: Expr) -> Ordering {
        if a == b {
            return Ordering::Equal;
        }
        let (left, right) = (self.entry(a), self.entry(b));
        (left.rank.cmp(&right.rank))
            .then(left.degree.total_cmp(&right.degree))
            .then_with(|| self.compare_factor_lists(a, b))
    }

    /// The factors of a term without its numeric coefficient.
    fn bare_factors<'a>(&'a self, e: &'a Expr) -> &'a [Expr] {
        match &*self.entry(*e).node {
            Node::Product(factors) => match &*self.entry(factors[0]).node {
                Node::Number(_) => &factors[1..],
                _ => factors,
            },
            _ => std::slice::from_ref(e),
        }
    }

    fn compare_factor_lists(&self, a: Expr, b: Expr) -> Ordering {
        let (left, right) = (self.bare_factors(&a), self.bare_factors(&b));
        for (&l, &r) in left.iter().zip(right) {
            if l != r {
                return self.compare_factors(l, r);
            }
        }
        // The same factors: then only the coefficients differ.
        left.len()
            .cmp(&right.len())
            .then_with(|| self.compare_coefficients(a, b))
    }

    fn compare_coefficients(&self, a: Expr, b: Expr) -> Ordering {
        let first = |e: Expr| match &*self.entry(e).node {
            Node::Product(factors) => Some(factors[0]),
            _ => None,
        };
        match (first(a), first(b)) {
            (Some(a), Some(b)) if a != b => self.compare_factors(a, b),
            (a, b) => a.is_some().cmp(&b.is_some()),
        }
    }

    /// The order of factors in a product: by base, then by exponent.
    fn compare_factors(&self, a: Expr, b: Expr) -> Ordering {
        if a == b {
            return Ordering::Equal;
        }
        let (base_a, exponent_a) = self.base_and_exponent(a);
        let (base_b, exponent_b) = self.base_and_exponent(b);
        if base_a != base_b {
            return self.compare_bases(base_a, base_b);
        }
        match (exponent_a, exponent_b) {
            (Some(x), Some(y)) => self.compare_terms(x, y),
            (x, y) => x.is_some().cmp(&y.is_some()),
        }
    }

    fn base_and_exponent(&self, e: Expr) -> (Expr, Option<Expr>) {
        match &*self.entry(e).node {
            Node::Power(base, exponent) => (*base, Some(*exponent)),
            _ => (e, None),
        }
    }

    fn compare_bases(&self, a: Expr, b: Expr) -> Ordering {
        let (left, right) = (self.entry(a), self.entry(b));
        (left.rank.cmp(&right.rank))
            .then_with(|| class(&left.node).cmp(&class(&right.node)))
            .then_with(|| left.depth.cmp(&right.depth))
            .then_with(|| match (&*left.node, &*right.node) {
                (Node::Number(x), Node::Number(y)) => x.cmp(y),
                (Node::Symbol(x), Node::Symbol(y)) => self.symbols[x.0 as usize]
                    .name
                    .cmp(&self.symbols[y.0 as usize].name),
                (Node::Sum(x), Node::Sum(y)) => self.compare_lists(x, y),
                (Node::Call(f, x), Node::Call(g, y)) => {
                    f.cmp(g).then_with(|| self.compare_lists(x, y))
                }
                (Node::Product(_), Node::Product(_)) => self.compare_factor_lists(a, b),
                _ => self.compare_factors(a, b),
            })
    }

    fn compare_lists(&self, a: &[Expr], b: &[Expr]) -> Ordering {
        for (&l, &r) in a.iter().zip(b) {
            if l != r {
                return self.compare_terms(l, r);
            }
        }
        a.len().cmp(&b.len())
    }
}

/// Numbers before symbols before compound bases.
fn class(node: &Node) -> u8 {
    match node {
        Node::Number(_) => 0,
        Node::Pi => 1,
        Node::Symbol(_) => 2,
        Node::Power(..) => 3,
        Node::Product(_) => 4,
        Node::Sum(_) => 5,
        Node::Call(..) => 6,
    }
}
