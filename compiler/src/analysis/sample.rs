//! Numbers beside the proofs: two formulas compared at points inside the ranges of their symbols.

use std::collections::BTreeMap;

use crate::symbolic::{Expr, Pool, Symbol};

/// Positions inside a range, as fractions; no two symbols of a point use the same one.
const STARTS: [f64; 4] = [0.137, 0.383, 0.619, 0.871];
/// The fractional part of the golden ratio spreads the symbols of a point over the unit interval.
const STRIDE: f64 = 0.618_033_988_749_894_9;

/// Whether two formulas agree, to rounding, wherever both have a value among a few fixed points, at
/// least one of them. It can refute an identity; it is no proof of one.
pub fn agree(pool: &Pool, left: Expr, right: Expr) -> bool {
    let mut symbols = pool.symbols_of(left);
    symbols.extend(pool.symbols_of(right));
    symbols.sort_unstable();
    symbols.dedup();
    let pairs = STARTS.iter().filter_map(|&start| {
        let point = point(pool, &symbols, start)?;
        let (left, right) = (pool.eval_f64(left, &point)?, pool.eval_f64(right, &point)?);
        (left.is_finite() && right.is_finite()).then_some((left, right))
    });
    let mut compared = 0;
    for (left, right) in pairs {
        // Cancellation inside a formula costs digits; a wrong term costs all of them.
        if (left - right).abs() > 1e-6 * (1.0 + left.abs().max(right.abs())) {
            return false;
        }
        compared += 1;
    }
    compared > 0
}

/// The values of a formula at the fixed points, where it has one.
pub fn values(pool: &Pool, e: Expr) -> Vec<f64> {
    let symbols = pool.symbols_of(e);
    let value = |&start: &f64| pool.eval_f64(e, &point(pool, &symbols, start)?);
    STARTS
        .iter()
        .filter_map(value)
        .filter(|v| v.is_finite())
        .collect()
}

/// A point inside the ranges of the symbols; none if an end has no value.
pub fn point(pool: &Pool, symbols: &[Symbol], start: f64) -> Option<BTreeMap<Symbol, f64>> {
    let mut values = BTreeMap::new();
    for (i, &symbol) in symbols.iter().enumerate() {
        let share = (start + STRIDE * i as f64).fract();
        place(pool, symbol, share, &mut values, 8)?;
    }
    Some(values)
}

/// Gives a symbol, and first those its range depends on, a value inside its range.
fn place(
    pool: &Pool,
    symbol: Symbol,
    share: f64,
    values: &mut BTreeMap<Symbol, f64>,
    depth: usize,
) -> Option<()> {
    if values.contains_key(&symbol) {
        return Some(());
    }
    let depth = depth.checked_sub(1)?;
    let range = pool.range(symbol);
    let mut end = |bound: Option<Expr>| -> Option<Option<f64>> {
        let Some(bound) = bound else {
            return Some(None);
        };
        for inner in pool.symbols_of(bound) {
            place(pool, inner, (share + STRIDE).fract(), values, depth)?;
        }
        Some(Some(pool.eval_f64(bound, values)?))
    };
    let (lower, upper) = (end(range.lower.value())?, end(range.upper.value())?);
    let value = match (lower, upper) {
        (None, None) => 4.0 * share - 2.0,
        (Some(lower), None) => lower + 0.1 + 2.0 * share,
        (None, Some(upper)) => upper - 0.1 - 2.0 * share,
        (Some(lower), Some(upper)) => lower + (0.05 + 0.9 * share) * (upper - lower),
    };
    values.insert(symbol, value);
    Some(())
}
