//! Is a formula free of some symbols, in whatever disguise?

use std::collections::BTreeMap;

use crate::symbolic::{Bound, Expr, Function, Interval, Node, Pool, Symbol, Truth};

/// The answer to "is this formula free of these symbols?".
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Freedom {
    /// It is, and this equal formula does not mention them.
    Free(Expr),
    /// It depends on this symbol: a derivative was seen to be non-zero, or a kink stands in the way.
    DependsOn(Symbol),
    /// Neither could be shown; the symbol is the one that resisted.
    CannotTell(Symbol),
}

/// Decides whether `e` is free of `symbols`, by simplification and otherwise by zero tests on its
/// derivatives; only a proof answers [`Freedom::Free`].
///
/// `x*(1/x + x) - x^2` is free of x although it mentions it. A formula with a kink (`abs`, `min`,
/// ...) that still mentions a symbol after simplification is never free of it: its derivative may
/// vanish on one side of the kink only.
pub fn free_of(pool: &Pool, e: Expr, symbols: &[Symbol]) -> Freedom {
    let moves = |&&symbol: &&Symbol| {
        pool.depends_on(e, symbol) && pool.is_plainly_not_zero(pool.derivative(e, symbol))
    };
    if let Some(&symbol) = symbols.iter().find(moves) {
        return Freedom::DependsOn(symbol);
    }
    let simple = pool.simplify(e);
    let present = pool.symbols_of(simple);
    let mentioned: Vec<Symbol> = symbols
        .iter()
        .copied()
        .filter(|s| !present.is_empty() && present.binary_search(s).is_ok())
        .collect();
    let Some(&first) = mentioned.first() else {
        return Freedom::Free(simple);
    };
    if kink_in(pool, simple, symbols).is_some() {
        return Freedom::DependsOn(first);
    }
    for &symbol in &mentioned {
        match pool.is_zero(pool.derivative(simple, symbol)) {
            Truth::Yes => {}
            Truth::No(_) => return Freedom::DependsOn(symbol),
            Truth::CannotTell => return Freedom::CannotTell(symbol),
        }
    }
    at_reference(pool, simple, &mentioned)
}

/// A function with a kink (`abs`, `min`, `max`, `sign`) whose argument depends on one of the symbols.
pub fn kink_in(pool: &Pool, e: Expr, symbols: &[Symbol]) -> Option<Function> {
    pool.has_kink(e)?;
    let moved = |part: Expr| symbols.iter().any(|&s| pool.depends_on(part, s));
    pool.postorder(e)
        .into_iter()
        .find_map(|part| match &*pool.node(part) {
            Node::Call(function, _) if !function.is_smooth() && moved(part) => Some(*function),
            _ => None,
        })
}

/// The value of a formula known to be constant in `symbols`, read off at a point inside their ranges
/// and proved equal.
fn at_reference(pool: &Pool, e: Expr, symbols: &[Symbol]) -> Freedom {
    for shift in [pool.one(), pool.ratio(1, 2)] {
        let point: BTreeMap<Symbol, Expr> = symbols
            .iter()
            .map(|&s| (s, inside(pool, pool.range(s), shift)))
            .collect();
        let value = pool.simplify(pool.substitute(e, &point));
        if pool.equal(e, value).is_yes() {
            return Freedom::Free(value);
        }
    }
    Freedom::CannotTell(symbols[0])
}

/// A point inside an interval, `shift` away from its finite end (at that fraction between two).
fn inside(pool: &Pool, range: Interval, shift: Expr) -> Expr {
    match (finite(range.lower), finite(range.upper)) {
        (None, None) => shift,
        (Some(lower), None) => pool.add(lower, shift),
        (None, Some(upper)) => pool.sub(upper, shift),
        (Some(lower), Some(upper)) => {
            let third = pool.div(shift, pool.int(3));
            pool.add(lower, pool.mul(third, pool.sub(upper, lower)))
        }
    }
}

fn finite(bound: Bound) -> Option<Expr> {
    bound.value()
}
