//! What a formula is made of: nodes, handles and symbols.

use super::function::Function;

/// An exact rational number; every number in a formula is one.
pub type Rational = dashu_ratio::RBig;

/// A handle to a formula of one [`Pool`](super::Pool). Equal structure, equal handle.
///
/// A handle is only meaningful together with the pool that made it. A node is always made after its
/// operands, so handles sorted in ascending order list operands before what uses them.
#[derive(Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Debug)]
pub struct Expr(pub(super) u32);

/// A handle to a named quantity of one [`Pool`](super::Pool).
#[derive(Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Debug)]
pub struct Symbol(pub(super) u32);

/// The role a symbol plays in the model. Printed products and sums put parameters before time and
/// time before states.
#[derive(Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Debug)]
pub enum SymbolKind {
    /// A constant of the model, known before a path starts.
    Parameter,
    /// The time `t`.
    Time,
    /// A state of the model.
    State,
    /// A coordinate or another symbol the compiler brought in.
    Auxiliary,
}

/// One node of a formula. [`Pool::node`](super::Pool::node) returns it for matching.
///
/// Sums hold at most one number, as their first operand; products likewise. A quotient is a product
/// with negative powers, a difference a sum with negative coefficients, a square root a power with
/// exponent 1/2.
#[derive(Clone, PartialEq, Eq, Hash, Debug)]
pub enum Node {
    /// An exact number.
    Number(Rational),
    /// The circle's constant.
    Pi,
    /// A named quantity.
    Symbol(Symbol),
    /// A sum of two or more terms, in structural order.
    Sum(Box<[Expr]>),
    /// A product of two or more factors, in structural order.
    Product(Box<[Expr]>),
    /// A power: base, exponent.
    Power(Expr, Expr),
    /// A function of its arguments.
    Call(Function, Box<[Expr]>),
}

impl Node {
    /// Calls `visit` with each operand, in order.
    pub fn for_each_child(&self, mut visit: impl FnMut(Expr)) {
        match self {
            Node::Number(_) | Node::Pi | Node::Symbol(_) => {}
            Node::Sum(items) | Node::Product(items) | Node::Call(_, items) => {
                items.iter().copied().for_each(visit);
            }
            Node::Power(base, exponent) => {
                visit(*base);
                visit(*exponent);
            }
        }
    }
}
