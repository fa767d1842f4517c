//! The normal form: quotients of polynomials over kernels.
//!
//! A kernel is what polynomial algebra takes as given: a symbol, pi, a prime under a root, the
//! exponential of a single term, a logarithm, another function of a normalised argument. Its exponent
//! in a monomial is a rational number. The identities between kernels are built in:
//!
//! - `exp` of a sum is a product; `x^p` is `exp(p*log(x))`, so powers of one base merge, and
//!   `exp(a*log(x))` is `x^a` for a number `a`;
//! - `log` of products and powers splits over factors that are known to be positive, or that must be
//!   for the formula to have a value;
//! - roots likewise; the root of a sum, and of a prime, is a kernel whose whole powers are replaced by
//!   what is under the root;
//! - in [`Mode::Proof`], trigonometric functions are exponentials with an imaginary unit, hyperbolic
//!   functions exponentials, their inverses logarithms, the normal density an exponential, and so on:
//!   complete, but no longer what a person would write. [`Mode::Light`] keeps the names and knows
//!   `sin^2 = 1 - cos^2` and `sinh^2 = cosh^2 - 1`.
//!
//! A formula is zero where it has a value if its numerator is the zero polynomial. The converse is
//! not claimed. Everything is budgeted: a part that would grow too large stays a kernel of its own.

mod arithmetic;
mod back;
mod coefficients;
mod convert;
mod exponent;
mod exponential;
mod factor;
mod fraction;
mod functions;
mod gcd;
mod integer_poly;
mod logarithm;
mod poly;
mod powers;
mod rules;
mod shape;
mod split;
mod squarefree;
#[cfg(test)]
mod tests;

use std::collections::BTreeMap;
use std::rc::Rc;

use super::node::{Expr, Node, Symbol};
use super::pool::Pool;
pub(super) use coefficients::OneKernel;
use exponent::Exponent;
pub(super) use fraction::Fraction;
use poly::{Monomial, Poly};
pub(super) use rules::Rule;

/// How far functions are taken apart.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub(super) enum Mode {
    /// Keeps the functions a person wrote, for printing.
    Light,
    /// Rewrites functions into few kinds of kernels, for proofs.
    Proof,
}

/// Computes normal forms of one pool in one mode.
#[derive(Clone, Copy)]
pub(super) struct Normalizer<'a> {
    pool: &'a Pool,
    mode: Mode,
}

impl Pool {
    /// The normal form of a formula, remembered.
    pub(super) fn normal(&self, e: Expr, mode: Mode) -> Rc<Fraction> {
        Normalizer { pool: self, mode }.normal(e)
    }

    /// Equal formulas in shapes a person might write, read off the normal form that keeps functions;
    /// none where all must weigh more than `limit`.
    pub(super) fn shapes(&self, e: Expr, limit: u64) -> Vec<Expr> {
        let normalizer = Normalizer {
            pool: self,
            mode: Mode::Light,
        };
        normalizer.shapes(&normalizer.normal(e), limit)
    }

    /// The coefficients of a polynomial in some symbols, by exponents in the order of `symbols`; none
    /// if the formula is no polynomial in them. Coefficients are free of the symbols and simplified; a
    /// coefficient of 0 is left out.
    ///
    /// ```
    /// use driftwright::symbolic::{Pool, SymbolKind};
    /// let pool = Pool::new();
    /// let (x, a) = (pool.symbol("x", SymbolKind::State), pool.symbol("a", SymbolKind::Parameter));
    /// let e = pool.mul(pool.var(x), pool.sub(pool.var(a), pool.var(x)));
    /// let coefficients = pool.polynomial_in(e, &[x]).unwrap();
    /// assert_eq!(coefficients[&vec![1]], pool.var(a));
    /// assert_eq!(coefficients[&vec![2]], pool.int(-1));
    /// ```
    pub fn polynomial_in(&self, e: Expr, symbols: &[Symbol]) -> Option<BTreeMap<Vec<u32>, Expr>> {
        let normalizer = Normalizer {
            pool: self,
            mode: Mode::Light,
        };
        let coefficients = normalizer.coefficients(&normalizer.normal(e), symbols)?;
        Some(
            coefficients
                .into_iter()
                .map(|(powers, c)| (powers, self.simplify(c)))
                .collect(),
        )
    }

    /// `e` as a fraction of polynomials in one kernel that holds all of it that depends on the symbol:
    /// the kernel, and the coefficients of numerator and denominator by its powers. None if there are
    /// several such kernels, or broken powers.
    pub(super) fn in_one_kernel(&self, e: Expr, symbol: Symbol) -> Option<OneKernel> {
        let normalizer = Normalizer {
            pool: self,
            mode: Mode::Light,
        };
        normalizer.one_kernel(&normalizer.normal(e), symbol)
    }
}

impl Normalizer<'_> {
    fn known(&self, e: Expr) -> Option<Rc<Fraction>> {
        self.pool
            .inner
            .borrow()
            .normals
            .get(&(e, self.mode))
            .cloned()
    }

    /// The normal form; a part that is over budget is a kernel.
    fn normal(&self, e: Expr) -> Rc<Fraction> {
        for part in self
            .pool
            .postorder_where(e, |part| self.known(part).is_none())
        {
            if self.known(part).is_some() {
                continue;
            }
            let result = self.node_normal(part).unwrap_or_else(|| self.kernel(part));
            self.pool
                .inner
                .borrow_mut()
                .normals
                .insert((part, self.mode), Rc::new(result));
        }
        self.known(e).unwrap_or_else(|| Rc::new(self.kernel(e)))
    }

    /// A kernel as it stands.
    fn kernel(&self, e: Expr) -> Fraction {
        Fraction::monomial(Monomial::of(e, Exponent::ONE))
    }

    fn node_normal(&self, e: Expr) -> Option<Fraction> {
        match &*self.pool.node(e) {
            Node::Number(value) => Some(Fraction::constant(value.clone())),
            Node::Pi | Node::Symbol(_) => Some(self.kernel(e)),
            Node::Sum(terms) => self.sum(terms),
            Node::Product(factors) => factors
                .iter()
                .try_fold(Fraction::polynomial(Poly::one()), |product, &f| {
                    self.multiply(&product, &self.normal(f))
                }),
            Node::Power(base, exponent) => match self.pool.as_number(*exponent) {
                Some(n) => self.power(*base, &n),
                None => self.symbolic_power(*base, *exponent),
            },
            Node::Call(function, arguments) => self.function(e, *function, arguments),
        }
    }

    /// A sum; terms without denominator are collected in one pass.
    fn sum(&self, terms: &[Expr]) -> Option<Fraction> {
        let mut polynomial = Poly::zero();
        let mut rest: Option<Fraction> = None;
        for &term in terms {
            let fraction = self.normal(term);
            if fraction.denominator.is_empty() {
                polynomial.add_assign(&fraction.numerator);
            } else {
                rest = Some(match rest {
                    None => (*fraction).clone(),
                    Some(sum) => self.add(&sum, &fraction)?,
                });
            }
        }
        let polynomial = Fraction::polynomial(polynomial);
        match rest {
            None => Some(polynomial),
            Some(sum) => self.add(&sum, &polynomial),
        }
    }
}
