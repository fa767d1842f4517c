//! Affine functions of some symbols.

use std::collections::BTreeMap;

use crate::symbolic::{Expr, Pool, Symbol};

/// `constant + sum_i slopes[i] symbols[i]`, coefficients free of the symbols.
pub(super) struct Affine {
    pub(super) constant: Expr,
    pub(super) slopes: Vec<Expr>,
}

/// Reads a formula as an affine function of the symbols; none where a derivative is not free of them.
pub(super) fn affine(pool: &Pool, e: Expr, symbols: &[Symbol]) -> Option<Affine> {
    let free = |e: Expr| !symbols.iter().any(|&s| pool.depends_on(e, s));
    let slope = |&symbol: &Symbol| {
        let slope = pool.derivative(e, symbol);
        let slope = if free(slope) {
            slope
        } else {
            pool.simplify(slope)
        };
        free(slope).then_some(slope)
    };
    let slopes = symbols.iter().map(slope).collect::<Option<Vec<Expr>>>()?;
    let origin: BTreeMap<Symbol, Expr> = symbols.iter().map(|&s| (s, pool.zero())).collect();
    Some(Affine {
        constant: pool.substitute(e, &origin),
        slopes,
    })
}
