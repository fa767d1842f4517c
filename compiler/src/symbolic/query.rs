//! Questions about the structure of a formula.

use std::collections::HashSet;
use std::rc::Rc;

use super::function::Function;
use super::node::{Expr, Node, Symbol, SymbolKind};
use super::pool::Pool;

impl Pool {
    /// The formula and all its parts, each once, operands before what uses them.
    pub fn postorder(&self, e: Expr) -> Vec<Expr> {
        self.postorder_where(e, |_| true)
    }

    /// As [`Pool::postorder`], but not looking into parts for which `enter` is false (nor listing
    /// them).
    pub(super) fn postorder_where(&self, e: Expr, enter: impl Fn(Expr) -> bool) -> Vec<Expr> {
        if !enter(e) {
            return Vec::new();
        }
        self.postorder_of(&[e], enter)
    }

    /// As [`Pool::postorder_where`], for several formulas at once.
    pub(super) fn postorder_of(
        &self,
        formulas: &[Expr],
        enter: impl Fn(Expr) -> bool,
    ) -> Vec<Expr> {
        let mut seen: HashSet<Expr, foldhash::fast::FixedState> = HashSet::default();
        let mut pending = formulas.to_vec();
        while let Some(next) = pending.pop() {
            if enter(next) && seen.insert(next) {
                self.node(next).for_each_child(|child| pending.push(child));
            }
        }
        let mut list: Vec<Expr> = seen.into_iter().collect();
        list.sort_unstable();
        list
    }

    /// The symbols in a formula, sorted by handle.
    pub fn symbols_of(&self, e: Expr) -> Vec<Symbol> {
        self.symbol_set(e).to_vec()
    }

    /// The symbols in a formula, cached.
    pub(super) fn symbol_set(&self, e: Expr) -> Rc<[Symbol]> {
        let known = |part: Expr| self.inner.borrow().symbols_of.get(&part).cloned();
        if let Some(symbols) = known(e) {
            return symbols;
        }
        for part in self.postorder_where(e, |part| known(part).is_none()) {
            let node = self.node(part);
            let symbols: Rc<[Symbol]> = if let Node::Symbol(symbol) = &*node {
                [*symbol].into()
            } else {
                let mut sets = Vec::new();
                node.for_each_child(|child| sets.extend(known(child)));
                union(&sets)
            };
            self.inner.borrow_mut().symbols_of.insert(part, symbols);
        }
        known(e).unwrap_or_else(|| [].into())
    }

    /// Whether the symbol occurs in the formula.
    pub fn depends_on(&self, e: Expr, symbol: Symbol) -> bool {
        self.symbol_set(e).binary_search(&symbol).is_ok()
    }

    /// Whether a symbol of that kind occurs in the formula.
    pub fn depends_on_kind(&self, e: Expr, kind: SymbolKind) -> bool {
        self.symbol_set(e)
            .iter()
            .any(|&symbol| self.symbol_kind(symbol) == kind)
    }

    /// A function in the formula that is not twice differentiable, if there is one.
    pub fn has_kink(&self, e: Expr) -> Option<Function> {
        if !self.inner.borrow().entry(e).kinked {
            return None;
        }
        self.postorder(e)
            .into_iter()
            .find_map(|part| match &*self.node(part) {
                Node::Call(function, _) if !function.is_smooth() => Some(*function),
                _ => None,
            })
    }

    /// How deep the formula nests; 0 for a number or a symbol.
    pub fn depth(&self, e: Expr) -> u32 {
        self.inner.borrow().entry(e).depth
    }

    /// The number of distinct nodes of a formula.
    pub fn size(&self, e: Expr) -> usize {
        self.postorder(e).len()
    }
}

/// The union of sorted sets; one of them itself where it holds the others.
fn union(sets: &[Rc<[Symbol]>]) -> Rc<[Symbol]> {
    let Some(largest) = sets.iter().max_by_key(|set| set.len()) else {
        return [].into();
    };
    let within = |symbol: &Symbol| largest.binary_search(symbol).is_ok();
    if sets.iter().all(|set| set.iter().all(within)) {
        return largest.clone();
    }
    let mut all: Vec<Symbol> = sets.iter().flat_map(|set| set.iter().copied()).collect();
    all.sort_unstable();
    all.dedup();
    all.into()
}
