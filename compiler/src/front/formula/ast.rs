//! The tree of a formula, every node with its place in the file.

use crate::source::Span;
use crate::symbolic::Rational;

/// A formula or a part of one.
#[derive(Clone, Debug)]
pub struct Ast {
    /// What it is.
    pub kind: AstKind,
    /// Its characters in the file.
    pub span: Span,
}

/// The kinds of formulas.
#[derive(Clone, Debug)]
pub enum AstKind {
    /// A number.
    Number(Rational),
    /// A name, function names excepted.
    Name(String),
    /// A function call.
    Call {
        /// The function's name.
        name: String,
        /// Where the name stands.
        name_span: Span,
        /// The arguments.
        arguments: Vec<Ast>,
    },
    /// Two or more terms.
    Sum(Vec<Term>),
    /// Two or more factors.
    Product(Vec<Factor>),
    /// A minus sign before something.
    Negate(Box<Ast>),
    /// `base ^ exponent`.
    Power(Box<Ast>, Box<Ast>),
}

/// A term of a sum.
#[derive(Clone, Debug)]
pub struct Term {
    /// Whether it is subtracted.
    pub negative: bool,
    /// The term.
    pub value: Ast,
}

/// A factor of a product.
#[derive(Clone, Debug)]
pub struct Factor {
    /// Whether the product is divided by it.
    pub inverse: bool,
    /// The operator before it (its own span for the first).
    pub operator: Span,
    /// The factor.
    pub value: Ast,
}

impl Ast {
    /// A node.
    pub fn new(kind: AstKind, span: Span) -> Self {
        Self { kind, span }
    }

    /// Calls `visit` on this node and every node inside it, from left to right.
    pub fn walk<'a>(&'a self, visit: &mut dyn FnMut(&'a Self)) {
        visit(self);
        match &self.kind {
            AstKind::Number(_) | AstKind::Name(_) => {}
            AstKind::Call { arguments, .. } => arguments.iter().for_each(|a| a.walk(visit)),
            AstKind::Sum(terms) => terms.iter().for_each(|term| term.value.walk(visit)),
            AstKind::Product(factors) => factors.iter().for_each(|f| f.value.walk(visit)),
            AstKind::Negate(inner) => inner.walk(visit),
            AstKind::Power(base, exponent) => {
                base.walk(visit);
                exponent.walk(visit);
            }
        }
    }

    /// The names it uses, in order, with repetitions.
    pub fn names(&self) -> Vec<(&str, Span)> {
        let mut names = Vec::new();
        self.walk(&mut |node| {
            if let AstKind::Name(name) = &node.kind {
                names.push((name.as_str(), node.span));
            }
        });
        names
    }
}
