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
        let mut seen = HashSet::new();
        let mut pending = vec![e];
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
        if let Some(known) = self.inner.borrow().symbols_of.get(&e) {
            return known.clone();
        }
        let mut symbols: Vec<Symbol> = (self.postorder(e).into_iter())
            .filter_map(|part| match &*self.node(part) {
                Node::Symbol(symbol) => Some(*symbol),
                _ => None,
            })
            .collect();
        symbols.sort_unstable();
        let symbols: Rc<[Symbol]> = symbols.into();
        self.inner
            .borrow_mut()
            .symbols_of
            .insert(e, symbols.clone());
        symbols
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
        self.postorder(e)
            .into_iter()
            .find_map(|part| match &*self.node(part) {
                Node::Call(function, _) if !function.is_smooth() => Some(*function),
                _ => None,
            })
    }

    /// The number of distinct nodes of a formula.
    pub fn size(&self, e: Expr) -> usize {
        self.postorder(e).len()
    }
}
