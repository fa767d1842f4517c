//! The structural order of terms and factors, which does not depend on when they were made.
//!
//! Terms of a sum ascend: constants, parameters, time, states; lower degrees first; then names.
//! Factors likewise, without the degree. Because equal structure is equal handle, a comparison walks
//! down one path only.

use std::cmp::Ordering;

use super::node::{Expr, Node, Symbol};
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

/// What is left of a comparison after one step.
enum Step {
    Done(Ordering),
    Terms(Expr, Expr),
    Factors(Expr, Expr),
}

impl Inner {
    /// The order of terms in a sum; numeric coefficients count last.
    fn compare_terms(&self, a: Expr, b: Expr) -> Ordering {
        self.walk(Step::Terms(a, b))
    }

    /// The order of factors in a product: by base, then by exponent.
    fn compare_factors(&self, a: Expr, b: Expr) -> Ordering {
        self.walk(Step::Factors(a, b))
    }

    /// Follows the path down to the first difference, without nesting calls: formulas may be deep.
    fn walk(&self, mut step: Step) -> Ordering {
        loop {
            step = match step {
                Step::Done(order) => return order,
                Step::Terms(a, b) | Step::Factors(a, b) if a == b => return Ordering::Equal,
                Step::Terms(a, b) => self.terms(a, b),
                Step::Factors(a, b) => self.factors(a, b),
            }
        }
    }

    fn terms(&self, a: Expr, b: Expr) -> Step {
        let (left, right) = (self.entry(a), self.entry(b));
        let outside = (left.rank.cmp(&right.rank)).then(left.degree.total_cmp(&right.degree));
        match outside {
            Ordering::Equal => self.factor_lists(a, b),
            order => Step::Done(order),
        }
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

    fn factor_lists(&self, a: Expr, b: Expr) -> Step {
        let (left, right) = (self.bare_factors(&a), self.bare_factors(&b));
        let different = left.iter().zip(right).find(|(l, r)| l != r);
        if let Some((&l, &r)) = different {
            return Step::Factors(l, r);
        }
        // The same factors: then only the coefficients differ.
        match left.len().cmp(&right.len()) {
            Ordering::Equal => self.coefficients(a, b),
            order => Step::Done(order),
        }
    }

    fn coefficients(&self, a: Expr, b: Expr) -> Step {
        let first = |e: Expr| match &*self.entry(e).node {
            Node::Product(factors) => Some(factors[0]),
            _ => None,
        };
        match (first(a), first(b)) {
            (Some(a), Some(b)) if a != b => Step::Factors(a, b),
            (a, b) => Step::Done(a.is_some().cmp(&b.is_some())),
        }
    }

    fn factors(&self, a: Expr, b: Expr) -> Step {
        let (base_a, exponent_a) = self.base_and_exponent(a);
        let (base_b, exponent_b) = self.base_and_exponent(b);
        if base_a != base_b {
            return self.bases(base_a, base_b);
        }
        match (exponent_a, exponent_b) {
            (Some(x), Some(y)) => Step::Terms(x, y),
            (x, y) => Step::Done(x.is_some().cmp(&y.is_some())),
        }
    }

    fn base_and_exponent(&self, e: Expr) -> (Expr, Option<Expr>) {
        match &*self.entry(e).node {
            Node::Power(base, exponent) => (*base, Some(*exponent)),
            _ => (e, None),
        }
    }

    fn bases(&self, a: Expr, b: Expr) -> Step {
        let (left, right) = (self.entry(a), self.entry(b));
        let outside = (left.rank.cmp(&right.rank))
            .then_with(|| class(&left.node).cmp(&class(&right.node)))
            .then_with(|| left.depth.cmp(&right.depth));
        match (outside, &*left.node, &*right.node) {
            (Ordering::Equal, Node::Number(x), Node::Number(y)) => Step::Done(x.cmp(y)),
            (Ordering::Equal, Node::Symbol(x), Node::Symbol(y)) => {
                let name = |symbol: &Symbol| &self.symbols[symbol.0 as usize].name;
                Step::Done(name(x).cmp(name(y)))
            }
            (Ordering::Equal, Node::Sum(x), Node::Sum(y)) => lists(x, y),
            (Ordering::Equal, Node::Call(f, x), Node::Call(g, y)) => match f.cmp(g) {
                Ordering::Equal => lists(x, y),
                order => Step::Done(order),
            },
            (Ordering::Equal, Node::Product(_), Node::Product(_)) => self.factor_lists(a, b),
            (Ordering::Equal, ..) => Step::Factors(a, b),
            (order, ..) => Step::Done(order),
        }
    }
}

fn lists(a: &[Expr], b: &[Expr]) -> Step {
    match a.iter().zip(b).find(|(l, r)| l != r) {
        Some((&l, &r)) => Step::Terms(l, r),
        None => Step::Done(a.len().cmp(&b.len())),
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
