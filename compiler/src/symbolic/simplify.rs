//! An equal formula in a shape a person would write.

use super::node::Expr;
use super::pool::Pool;

impl Pool {
    /// An equal formula, shorter where algebra finds one: the expanded form competes with the one
    /// given.
    pub fn simplify(&self, e: Expr) -> Expr {
        let expanded = self.expand(e);
        if self.format(expanded).len() < self.format(e).len() {
            expanded
        } else {
            e
        }
    }
}
