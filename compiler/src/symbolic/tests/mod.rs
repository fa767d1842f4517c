//! Tests of the formula algebra.

mod balls;
mod basics;
mod budgets;
mod derivatives;
mod enclosures;
mod equations;
mod inequalities;
mod intervals;
mod inverse;
mod parts;
mod precise;
mod probing;
mod programs;
mod properties;
mod shapes;
mod signs;
mod soundness;
mod structure;
mod undoing;

use crate::front::formula::parse_in_pool;
use crate::symbolic::{Bound, Expr, Interval, Pool, SymbolKind};

/// A pool in which `a b c x y z` are any real number, `p q r s sigma kappa theta` and `t` positive,
/// `u` and `v` between 0 and 1, `w` negative.
pub(super) fn pool() -> Pool {
    let pool = Pool::new();
    let (zero, one) = (pool.zero(), pool.one());
    let names = [
        ("a b c mu", SymbolKind::Parameter),
        ("p q r s sigma kappa theta u v w", SymbolKind::Parameter),
    ];
    for (list, kind) in names
        .into_iter()
        .chain([("t", SymbolKind::Time), ("x y z X Y S", SymbolKind::State)])
    {
        for name in list.split(' ') {
            let symbol = pool.symbol(name, kind);
            let (lower, upper) = match name {
                "p" | "q" | "r" | "s" | "sigma" | "kappa" | "theta" | "t" | "S" => {
                    (Bound::Open(zero), Bound::Infinite)
                }
                "u" | "v" => (Bound::Open(zero), Bound::Open(one)),
                "w" => (Bound::Infinite, Bound::Open(zero)),
                _ => (Bound::Infinite, Bound::Infinite),
            };
            pool.set_range(symbol, Interval { lower, upper });
        }
    }
    pool
}

/// The formula a text stands for.
pub(super) fn parse(pool: &Pool, text: &str) -> Expr {
    parse_in_pool(pool, text).unwrap_or_else(|errors| panic!("{text}: {errors:?}"))
}
