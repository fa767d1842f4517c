//! Sums and products: fold exact numbers, collect equal terms and factors, never expand.

use std::collections::HashMap;

use dashu_base::UnsignedAbs;

use super::node::{Expr, Node, Rational};
use super::pool::Pool;

impl Pool {
    /// `a + b`. For many terms use [`Pool::sum`], which is linear in their number.
    pub fn add(&self, a: Expr, b: Expr) -> Expr {
        self.sum([a, b])
    }

    /// `a - b`.
    pub fn sub(&self, a: Expr, b: Expr) -> Expr {
        self.sum([a, self.neg(b)])
    }

    /// `-a`.
    pub fn neg(&self, a: Expr) -> Expr {
        self.product([self.int(-1), a])
    }

    /// `a*b`. For many factors use [`Pool::product`].
    pub fn mul(&self, a: Expr, b: Expr) -> Expr {
        self.product([a, b])
    }

    /// `a/b`. A division by the number 0 is kept as it is; it has no value.
    pub fn div(&self, a: Expr, b: Expr) -> Expr {
        self.product([a, self.pow(b, self.int(-1))])
    }

    /// `a^2`.
    pub fn square(&self, a: Expr) -> Expr {
        self.pow(a, self.int(2))
    }

    /// `sqrt(a)`, which is `a^(1/2)`.
    pub fn sqrt(&self, a: Expr) -> Expr {
        self.pow(a, self.ratio(1, 2))
    }

    /// The sum of all terms: flattened, numbers added, equal terms collected.
    pub fn sum(&self, terms: impl IntoIterator<Item = Expr>) -> Expr {
        let mut collected = Collected::default();
        for term in terms {
            self.collect_term(term, &Rational::ONE, &mut collected);
        }
        let Collected {
            constant,
            order,
            coefficients,
        } = collected;
        let mut items = Vec::with_capacity(order.len() + 1);
        for bare in order {
            let coefficient = &coefficients[&bare];
            if !coefficient.is_zero() {
                items.push(self.scale(coefficient.clone(), bare));
            }
        }
        if !constant.is_zero() {
            items.push(self.number(constant));
        }
        match items.len() {
            0 => self.zero(),
            1 => items[0],
            _ => {
                self.sort_terms(&mut items);
                self.intern(Node::Sum(items.into()))
            }
        }
    }

    /// Adds `factor*term` to what has been collected; sums are flattened, also behind a sign.
    fn collect_term(&self, term: Expr, factor: &Rational, into: &mut Collected) {
        match &*self.node(term) {
            Node::Number(value) => into.constant += factor * value,
            Node::Sum(items) => items
                .iter()
                .for_each(|&item| self.collect_term(item, factor, into)),
            Node::Product(items) => match self.as_number(items[0]) {
                Some(coefficient) => {
                    let coefficient = factor * coefficient;
                    let bare = self.without_coefficient(items);
                    if coefficient.numerator().unsigned_abs().is_one()
                        && coefficient.denominator().is_one()
                        && matches!(&*self.node(bare), Node::Sum(_))
                    {
                        self.collect_term(bare, &coefficient, into);
                    } else {
                        into.add(bare, coefficient);
                    }
                }
                None => into.add(term, factor.clone()),
            },
            _ => into.add(term, factor.clone()),
        }
    }

    /// The product of all factors but the first, a number.
    pub(super) fn without_coefficient(&self, factors: &[Expr]) -> Expr {
        match &factors[1..] {
            [single] => *single,
            rest => self.intern(Node::Product(rest.into())),
        }
    }

    /// `coefficient*bare`, where `bare` has no numeric coefficient.
    fn scale(&self, coefficient: Rational, bare: Expr) -> Expr {
        if coefficient.is_one() {
            return bare;
        }
        let mut factors = vec![self.number(coefficient)];
        match &*self.node(bare) {
            Node::Product(items) => factors.extend_from_slice(items),
            _ => factors.push(bare),
        }
        self.intern(Node::Product(factors.into()))
    }

    /// The product of all factors: flattened, numbers multiplied, powers of one base collected.
    pub fn product(&self, factors: impl IntoIterator<Item = Expr>) -> Expr {
        let mut coefficient = Rational::ONE;
        let mut order = Vec::new();
        let mut exponents: HashMap<Expr, Vec<Expr>> = HashMap::new();
        let mut add = |base, exponent| {
            let list = exponents.entry(base).or_default();
            if list.is_empty() {
                order.push(base);
            }
            list.push(exponent);
        };
        let one = self.one();
        let mut pending: Vec<Expr> = factors.into_iter().collect();
        pending.reverse();
        while let Some(factor) = pending.pop() {
            match &*self.node(factor) {
                Node::Number(value) => coefficient *= value,
                Node::Product(items) => pending.extend(items.iter().rev()),
                Node::Power(base, exponent) => add(*base, *exponent),
                _ => add(factor, one),
            }
        }
        let mut items = Vec::with_capacity(order.len() + 1);
        for base in order {
            let list = &exponents[&base];
            let power = match list[..] {
                [single] => self.pow(base, single),
                _ => self.pow(base, self.sum(list.iter().copied())),
            };
            match &*self.node(power) {
                Node::Number(value) => coefficient *= value,
                // Taking a power can pull a number out of a root.
                Node::Product(parts) => parts.iter().for_each(|&part| match self.as_number(part) {
                    Some(value) => coefficient *= value,
                    None => items.push(part),
                }),
                _ => items.push(power),
            }
        }
        self.finish_product(coefficient, items)
    }

    pub(super) fn finish_product(&self, coefficient: Rational, mut items: Vec<Expr>) -> Expr {
        if coefficient.is_zero() {
            // 0 times a division by zero has no value either.
            return items
                .into_iter()
                .find(|&e| self.is_undefined(e))
                .unwrap_or_else(|| self.zero());
        }
        if items.is_empty() {
            return self.number(coefficient);
        }
        self.sort_factors(&mut items);
        if !coefficient.is_one() {
            items.insert(0, self.number(coefficient));
        }
        match items[..] {
            [single] => single,
            _ => self.intern(Node::Product(items.into())),
        }
    }

    /// Whether the formula is a negative power of the number 0.
    fn is_undefined(&self, e: Expr) -> bool {
        matches!(&*self.node(e), Node::Power(base, _) if self.is_zero_literal(*base))
    }
}

/// Terms of a sum on their way: each bare term with its coefficient, in the order of appearance.
#[derive(Default)]
struct Collected {
    constant: Rational,
    order: Vec<Expr>,
    coefficients: HashMap<Expr, Rational>,
}

impl Collected {
    fn add(&mut self, bare: Expr, coefficient: Rational) {
        match self.coefficients.entry(bare) {
            std::collections::hash_map::Entry::Occupied(mut entry) => {
                *entry.get_mut() += coefficient
            }
            std::collections::hash_map::Entry::Vacant(entry) => {
                self.order.push(bare);
                entry.insert(coefficient);
            }
        }
    }
}
