//! The pool: hash-consing of nodes, interning of symbols, and the caches.

use std::cell::RefCell;
use std::collections::HashMap;
use std::rc::Rc;

use super::facts::Interval;
use super::node::{Expr, Node, Rational, Symbol, SymbolKind};
use super::normal::{Fraction, Mode, Rule};

/// Holds the formulas of one model. Cloning gives another handle to the same pool.
///
/// ```
/// use driftwright::symbolic::{Pool, SymbolKind};
/// let pool = Pool::new();
/// let x = pool.var(pool.symbol("x", SymbolKind::State));
/// assert_eq!(pool.add(x, x), pool.mul(pool.int(2), x));
/// assert_eq!(pool.format(pool.sub(pool.square(x), pool.ratio(1, 2))), "x^2 - 1/2");
/// ```
#[derive(Clone)]
pub struct Pool {
    pub(super) inner: Rc<RefCell<Inner>>,
}

/// What the pool knows of a symbol.
pub(super) struct SymbolData {
    pub(super) name: Rc<str>,
    pub(super) kind: SymbolKind,
    pub(super) range: Interval,
}

/// A node with what is cheap to know of it when it is made.
pub(super) struct Entry {
    pub(super) node: Rc<Node>,
    /// The highest kind of symbol in it, counted from 1; 0 without symbols.
    pub(super) rank: u8,
    /// A degree to sort terms by: the exponent of a power, the sum over factors, the largest term.
    pub(super) degree: f64,
    /// How deep it nests; 0 without operands.
    pub(super) depth: u32,
}

#[derive(Default)]
pub(super) struct Inner {
    pub(super) entries: Vec<Entry>,
    ids: HashMap<Rc<Node>, Expr>,
    pub(super) symbols: Vec<SymbolData>,
    names: HashMap<Rc<str>, Symbol>,
    pub(super) symbols_of: HashMap<Expr, Rc<[Symbol]>>,
    pub(super) normals: HashMap<(Expr, Mode), Rc<Fraction>>,
    pub(super) rules: HashMap<(Expr, Mode), Rc<Rule>>,
    pub(super) simplified: HashMap<Expr, Expr>,
    pub(super) signs: HashMap<Expr, (super::Sign, usize)>,
    pub(super) derivatives: HashMap<(Expr, Symbol), Expr>,
}

impl Default for Pool {
    fn default() -> Self {
        Pool::new()
    }
}

impl Pool {
    /// An empty pool.
    pub fn new() -> Pool {
        Pool {
            inner: Rc::default(),
        }
    }

    /// The symbol with that name, made on first use; a later call returns the same symbol and leaves
    /// its kind as it was.
    pub fn symbol(&self, name: &str, kind: SymbolKind) -> Symbol {
        let mut inner = self.inner.borrow_mut();
        if let Some(&symbol) = inner.names.get(name) {
            return symbol;
        }
        let symbol = Symbol(inner.symbols.len() as u32);
        let name: Rc<str> = name.into();
        inner.symbols.push(SymbolData {
            name: name.clone(),
            kind,
            range: Interval::REAL,
        });
        inner.names.insert(name, symbol);
        symbol
    }

    /// The symbol with that name, if there is one.
    pub fn find_symbol(&self, name: &str) -> Option<Symbol> {
        self.inner.borrow().names.get(name).copied()
    }

    /// States where the values of a symbol lie. Signs, and the points at which formulas are compared,
    /// follow from it.
    pub fn set_range(&self, symbol: Symbol, range: Interval) {
        let mut inner = self.inner.borrow_mut();
        inner.symbols[symbol.0 as usize].range = range;
        inner.signs.clear();
        inner.normals.clear();
        inner.simplified.clear();
    }

    /// Where the values of a symbol lie; the whole line unless stated.
    pub fn range(&self, symbol: Symbol) -> Interval {
        self.inner.borrow().symbols[symbol.0 as usize].range
    }

    /// The name of a symbol.
    pub fn symbol_name(&self, symbol: Symbol) -> Rc<str> {
        self.inner.borrow().symbols[symbol.0 as usize].name.clone()
    }

    /// The kind of a symbol.
    pub fn symbol_kind(&self, symbol: Symbol) -> SymbolKind {
        self.inner.borrow().symbols[symbol.0 as usize].kind
    }

    /// The node behind a handle.
    pub fn node(&self, e: Expr) -> Rc<Node> {
        self.inner.borrow().entries[e.0 as usize].node.clone()
    }

    /// An exact number.
    pub fn number(&self, value: Rational) -> Expr {
        self.intern(Node::Number(value))
    }

    /// A whole number.
    pub fn int(&self, value: i64) -> Expr {
        self.number(Rational::from(value))
    }

    /// A fraction.
    ///
    /// # Panics
    /// If `denominator` is zero.
    pub fn ratio(&self, numerator: i64, denominator: i64) -> Expr {
        self.number(Rational::from_parts_signed(
            numerator.into(),
            denominator.into(),
        ))
    }

    /// The circle's constant.
    pub fn pi(&self) -> Expr {
        self.intern(Node::Pi)
    }

    /// The formula that is just this symbol.
    pub fn var(&self, symbol: Symbol) -> Expr {
        self.intern(Node::Symbol(symbol))
    }

    /// The number 0.
    pub fn zero(&self) -> Expr {
        self.int(0)
    }

    /// The number 1.
    pub fn one(&self) -> Expr {
        self.int(1)
    }

    /// The value, if the formula is a number.
    pub fn as_number(&self, e: Expr) -> Option<Rational> {
        match &*self.inner.borrow().entries[e.0 as usize].node {
            Node::Number(value) => Some(value.clone()),
            _ => None,
        }
    }

    /// Whether the formula is the number 0. A formula that equals 0 by algebra needs
    /// [`Pool::is_zero`].
    pub fn is_zero_literal(&self, e: Expr) -> bool {
        self.as_number(e).is_some_and(|n| n.is_zero())
    }

    /// Whether the formula is the number 1.
    pub fn is_one_literal(&self, e: Expr) -> bool {
        self.as_number(e).is_some_and(|n| n.is_one())
    }

    /// The handle of a node whose operands are already in the order the constructors give them.
    pub(super) fn intern(&self, node: Node) -> Expr {
        let mut inner = self.inner.borrow_mut();
        if let Some(&e) = inner.ids.get(&node) {
            return e;
        }
        let (rank, degree, depth) = inner.measure(&node);
        let e =
            Expr(u32::try_from(inner.entries.len()).expect("fewer than 2^32 formulas in a model"));
        let node = Rc::new(node);
        inner.entries.push(Entry {
            node: node.clone(),
            rank,
            degree,
            depth,
        });
        inner.ids.insert(node, e);
        e
    }
}

impl Inner {
    pub(super) fn entry(&self, e: Expr) -> &Entry {
        &self.entries[e.0 as usize]
    }

    /// Rank, degree and depth of a node from those of its operands.
    fn measure(&self, node: &Node) -> (u8, f64, u32) {
        let (mut rank, mut depth) = (0, 0);
        node.for_each_child(|child| {
            rank = rank.max(self.entry(child).rank);
            depth = depth.max(self.entry(child).depth + 1);
        });
        let degree = match node {
            Node::Number(_) | Node::Pi => 0.0,
            Node::Symbol(symbol) => {
                rank = self.symbols[symbol.0 as usize].kind as u8 + 1;
                1.0
            }
            Node::Call(..) => 1.0,
            Node::Sum(terms) => terms
                .iter()
                .map(|&t| self.entry(t).degree)
                .fold(0.0, f64::max),
            Node::Product(factors) => factors.iter().map(|&f| self.entry(f).degree).sum(),
            Node::Power(base, exponent) => match &*self.entry(*exponent).node {
                Node::Number(n) => self.entry(*base).degree * n.to_f64_fast(),
                _ => 1.0,
            },
        };
        (rank, degree, depth)
    }
}
