//! The pool: hash-consing of nodes, interning of symbols, and the caches.

use std::cell::RefCell;
use std::collections::{BTreeSet, HashMap};
use std::rc::Rc;

use super::ball::Ball;
use super::facts::Interval;
use super::function::Function;
use super::limit::Limit;
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
    /// Whether a function occurs in it that is not smooth.
    pub(super) kinked: bool,
    /// Whether a function other than exponentials and logarithms occurs in it.
    pub(super) functional: bool,
}

/// A table of what is known of formulas. Handles need no defence against chosen keys.
pub(super) type Table<K, V> = HashMap<K, V, foldhash::fast::FixedState>;

#[derive(Default)]
pub(super) struct Inner {
    pub(super) entries: Vec<Entry>,
    ids: Table<Rc<Node>, Expr>,
    pub(super) symbols: Vec<SymbolData>,
    names: Table<Rc<str>, Symbol>,
    pub(super) symbols_of: Table<Expr, Rc<[Symbol]>>,
    pub(super) normals: Table<(Expr, Mode), Rc<Fraction>>,
    pub(super) rules: Table<(Expr, Mode), Rc<Rule>>,
    pub(super) simplified: Table<Expr, Expr>,
    /// Formulas with the arguments of their functions simplified.
    pub(super) rearranged: Table<Expr, Expr>,
    /// Values at two fixed points.
    pub(super) probes: Table<Expr, [Ball; 2]>,
    pub(super) weights: Table<Expr, u64>,
    /// Term operations that normal forms have taken so far.
    algebra: u64,
    exceeded: BTreeSet<Limit>,
    pub(super) signs: Table<Expr, (super::Sign, usize)>,
    pub(super) derivatives: Table<(Expr, Symbol), Expr>,
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
        self.set_ranges([(symbol, range)]);
    }

    /// As [`Pool::set_range`] for several symbols. What was worked out under other ranges is forgotten,
    /// once for all of them.
    pub fn set_ranges(&self, ranges: impl IntoIterator<Item = (Symbol, Interval)>) {
        let mut inner = self.inner.borrow_mut();
        let mut changed = false;
        for (symbol, range) in ranges {
            // Nothing is known yet of formulas with a symbol that stands in none.
            let used = inner.ids.contains_key(&Node::Symbol(symbol));
            let known = &mut inner.symbols[symbol.0 as usize].range;
            changed |= used && *known != range;
            *known = range;
        }
        if changed {
            inner.signs.clear();
            inner.normals.clear();
            inner.simplified.clear();
            inner.rearranged.clear();
            inner.probes.clear();
        }
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
        self.number_is(e, Rational::clone)
    }

    /// Something about the value, if the formula is a number.
    fn number_is<T>(&self, e: Expr, ask: impl Fn(&Rational) -> T) -> Option<T> {
        match &*self.inner.borrow().entries[e.0 as usize].node {
            Node::Number(value) => Some(ask(value)),
            _ => None,
        }
    }

    /// Takes term operations from the budget of the model's algebra; false when it cannot give that
    /// many any more. Small steps are always granted, so that every formula keeps some normal form.
    pub(super) fn may_spend(&self, operations: u64) -> bool {
        const SMALL: u64 = 500;
        if operations > SMALL {
            return self.may_spend_all(operations);
        }
        self.inner.borrow_mut().algebra += operations;
        true
    }

    /// As [`Pool::may_spend`], small steps counted like others.
    pub(super) fn may_spend_all(&self, operations: u64) -> bool {
        let spent = self.operations().saturating_add(operations);
        if spent > Limit::Algebra.amount() {
            self.exceed(Limit::Algebra);
            return false;
        }
        self.inner.borrow_mut().algebra = spent;
        true
    }

    /// Notes that something was left undone for a budget.
    pub fn exceed(&self, limit: Limit) {
        self.inner.borrow_mut().exceeded.insert(limit);
    }

    /// The budgets for which something has been left undone so far: answers may have become *cannot
    /// tell* then, or formulas longer than need be.
    pub fn exceeded(&self) -> Vec<Limit> {
        self.inner.borrow().exceeded.iter().copied().collect()
    }

    /// Term operations that the normal forms of this pool have taken so far: a measure of work that is
    /// the same on every machine.
    pub fn operations(&self) -> u64 {
        self.inner.borrow().algebra
    }

    /// The number of distinct formulas in the pool: a measure of work that is the same on every
    /// machine.
    pub fn node_count(&self) -> usize {
        self.inner.borrow().entries.len()
    }

    /// Whether the formula is the number 0. A formula that equals 0 by algebra needs
    /// [`Pool::is_zero`].
    pub fn is_zero_literal(&self, e: Expr) -> bool {
        self.number_is(e, Rational::is_zero) == Some(true)
    }

    /// Whether the formula is the number 1.
    pub fn is_one_literal(&self, e: Expr) -> bool {
        self.number_is(e, Rational::is_one) == Some(true)
    }

    /// The handle of a node whose operands are already in the order the constructors give them.
    pub(super) fn intern(&self, node: Node) -> Expr {
        let mut inner = self.inner.borrow_mut();
        if let Some(&e) = inner.ids.get(&node) {
            return e;
        }
        let (rank, degree, depth) = inner.measure(&node);
        let (kinked, functional) = inner.functions(&node);
        let e =
            Expr(u32::try_from(inner.entries.len()).expect("fewer than 2^32 formulas in a model"));
        let node = Rc::new(node);
        inner.entries.push(Entry {
            node: node.clone(),
            rank,
            degree,
            depth,
            kinked,
            functional,
        });
        inner.ids.insert(node, e);
        e
    }
}

impl Inner {
    pub(super) fn entry(&self, e: Expr) -> &Entry {
        &self.entries[e.0 as usize]
    }

    /// Whether functions that are not smooth, and others than exponentials and logarithms, occur.
    fn functions(&self, node: &Node) -> (bool, bool) {
        let (mut kinked, mut functional) = match node {
            Node::Call(f, _) => (!f.is_smooth(), !matches!(f, Function::Exp | Function::Log)),
            _ => (false, false),
        };
        node.for_each_child(|child| {
            kinked |= self.entry(child).kinked;
            functional |= self.entry(child).functional;
        });
        (kinked, functional)
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
