//! An equal formula in a shape a person would write.

use dashu_base::BitTest;

use super::limit::Limit;
use super::node::{Expr, Node, Rational};
use super::normal::Mode;
use super::pool::Pool;

impl Pool {
    /// An equal formula, as a person would write it: among the shapes the normal form offers and the
    /// one given, the lightest. The result is remembered.
    ///
    /// ```
    /// use driftwright::front::formula::parse_in_pool;
    /// use driftwright::symbolic::{Pool, SymbolKind};
    /// let pool = Pool::new();
    /// for name in ["mu", "sigma", "x"] {
    ///     pool.symbol(name, SymbolKind::Parameter);
    /// }
    /// let drift = parse_in_pool(&pool, "mu*x*(1/x) + (1/2)*(sigma*x)^2*(-1/x^2)").unwrap();
    /// assert_eq!(pool.format(pool.simplify(drift)), "mu - sigma^2/2");
    /// ```
    pub fn simplify(&self, e: Expr) -> Expr {
        if let Some(known) = self.known_simple(e) {
            return known;
        }
        // Operands first, so that deep formulas do not nest calls.
        for part in self.postorder_where(e, |part| self.known_simple(part).is_none()) {
            if self.known_simple(part).is_none() {
                let best = self
                    .constant_value(part)
                    .unwrap_or_else(|| self.lightest_shape(part));
                self.inner.borrow_mut().simplified.insert(part, best);
            }
        }
        self.known_simple(e).unwrap_or(e)
    }

    fn known_simple(&self, e: Expr) -> Option<Expr> {
        self.inner.borrow().simplified.get(&e).copied()
    }

    /// The number a formula with functions in it is by algebra, if it is one.
    fn constant_value(&self, e: Expr) -> Option<Expr> {
        if !self.inner.borrow().entry(e).functional || self.varies(e) {
            return None;
        }
        Some(self.number(self.normal(e, Mode::Proof).as_constant()?))
    }

    fn lightest_shape(&self, e: Expr) -> Expr {
        let parts = self.simplify_parts(e);
        let mut best = (self.weight(parts), parts);
        if self.is_heavy(parts) {
            self.exceed(Limit::Simplification);
            return parts;
        }
        for shape in self.shapes(parts, best.0) {
            // Of two equally light shapes the author's own stays.
            let shape = self.simplify_arguments(shape);
            let weight = self.weight(shape);
            if weight < best.0 {
                best = (weight, shape);
            }
        }
        best.1
    }

    /// The same formula with its terms and factors simplified one by one.
    fn simplify_parts(&self, e: Expr) -> Expr {
        match &*self.node(e) {
            Node::Number(_) | Node::Pi | Node::Symbol(_) => e,
            node => self.rebuild(node, |part| self.simplify(part)),
        }
    }

    /// The same formula with the arguments of its functions and the bases of its roots simplified.
    fn simplify_arguments(&self, e: Expr) -> Expr {
        let known = self.inner.borrow().rearranged.get(&e).copied();
        known.unwrap_or_else(|| {
            let result = self.rearrange(e);
            self.inner.borrow_mut().rearranged.insert(e, result);
            result
        })
    }

    fn rearrange(&self, e: Expr) -> Expr {
        match &*self.node(e) {
            Node::Number(_) | Node::Pi | Node::Symbol(_) => e,
            node @ (Node::Sum(_) | Node::Product(_)) => {
                self.rebuild(node, |part| self.simplify_arguments(part))
            }
            node @ Node::Power(_, exponent)
                if self.as_number(*exponent).is_some_and(|n| n.is_int()) =>
            {
                self.rebuild(node, |part| self.simplify_arguments(part))
            }
            node => self.rebuild(
                node,
                |part| if part == e { part } else { self.simplify(part) },
            ),
        }
    }

    /// Whether the formula is too long for [`Pool::simplify`] to look for another shape of the whole.
    pub fn is_heavy(&self, e: Expr) -> bool {
        self.weight(e) > Limit::Simplification.amount()
    }

    /// How much there is to read: names count two, whole numbers and operators one. Remembered.
    pub(super) fn weight(&self, e: Expr) -> u64 {
        let known = |part: Expr| self.inner.borrow().weights.get(&part).copied();
        for part in self.postorder_where(e, |part| known(part).is_none()) {
            let of = |child: &Expr| known(*child).unwrap_or(0);
            let sum = |items: &[Expr]| {
                items
                    .iter()
                    .map(of)
                    .fold(items.len() as u64 - 1, u64::saturating_add)
            };
            let weight = match &*self.node(part) {
                Node::Number(value) if value.is_int() => 1 + length_weight(value),
                Node::Number(value) => 3 + length_weight(value),
                Node::Pi | Node::Symbol(_) => 2,
                Node::Sum(items) => sum(items),
                Node::Product(items) => sum(items).saturating_add_signed(self.sign_weight(items)),
                Node::Power(base, exponent) => {
                    let inverse = self
                        .as_number(*exponent)
                        .is_some_and(|n| n == Rational::from(-1));
                    of(base).saturating_add(if inverse { 0 } else { 1 + of(exponent) })
                }
                Node::Call(_, items) => sum(items).saturating_add(2),
            };
            self.inner.borrow_mut().weights.insert(part, weight);
        }
        known(e).unwrap_or(0)
    }

    /// A sign weighs less than a number, but before a sum more than inside it.
    fn sign_weight(&self, factors: &[Expr]) -> i64 {
        let number = self.as_number(factors[0]);
        let sum = |e: &Expr| matches!(&*self.node(*e), Node::Sum(_));
        match number {
            Some(n) if n < Rational::ZERO && factors.iter().any(sum) => 2,
            Some(n) if n == Rational::from(-1) => -1,
            _ => 0,
        }
    }
}

/// What a number weighs beyond one that is easily read: as many as its groups of 16 bits past 64.
fn length_weight(value: &Rational) -> u64 {
    let bits = value.numerator().bit_len() + value.denominator().bit_len();
    (bits.saturating_sub(128) / 16) as u64
}
