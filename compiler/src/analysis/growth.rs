//! Growth and smoothness of step coefficients, which the theorems on orders assume.

use super::asymptotics::{Leading, Side, at_end};
use crate::symbolic::{Bound, Expr, Interval, Pool, Rational, Sign, Symbol, SymbolKind};

/// What is known of a coefficient as a function of the coordinates.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Growth {
    /// Every derivative is bounded: globally Lipschitz.
    Lipschitz,
    /// Grows faster than linearly in this symbol, like this power of it.
    Superlinear {
        /// The symbol.
        symbol: Symbol,
        /// The power.
        power: Rational,
    },
    /// The derivative in this symbol is unbounded or could not be bounded.
    NotShown {
        /// The symbol.
        symbol: Symbol,
    },
}

/// Classifies a coefficient on the ranges of `symbols`, the coordinates.
pub fn growth(pool: &Pool, coefficient: Expr, symbols: &[Symbol]) -> Growth {
    let mentioned: Vec<Symbol> = symbols
        .iter()
        .copied()
        .filter(|&s| pool.depends_on(coefficient, s))
        .collect();
    if let [symbol] = mentioned[..]
        && let Some(power) = power_at_infinity(pool, coefficient, symbol)
        && power > Rational::ONE
    {
        return Growth::Superlinear { symbol, power };
    }
    let unbounded = mentioned.iter().find(|&&s| {
        let slope = pool.simplify(pool.derivative(coefficient, s));
        !is_bounded(pool, slope, symbols)
    });
    match unbounded {
        Some(&symbol) => Growth::NotShown { symbol },
        None => Growth::Lipschitz,
    }
}

/// Whether a drift that grows faster than linearly does so towards smaller values of |x| at every
/// infinite end of the range of x, with which it is one-sided Lipschitz out there.
pub fn pulls_inward(pool: &Pool, drift: Expr, x: Symbol) -> bool {
    let range = pool.range(x);
    let ends = [(range.lower, Side::Lower), (range.upper, Side::Upper)];
    let infinite = |(end, _): &(Bound, Side)| end.value().is_none();
    ends.into_iter()
        .filter(infinite)
        .all(|(end, side)| match at_end(pool, drift, x, end, side) {
            Leading::Zero => true,
            Leading::Term { exponent, .. } if -&exponent <= Rational::ONE => true,
            Leading::Term { coefficient, .. } => match side {
                Side::Lower => pool.sign(coefficient).is_positive(),
                Side::Upper => pool.sign(coefficient) == Sign::Negative,
            },
            Leading::Unknown => false,
        })
}

/// The largest power of |x| a formula grows like towards an infinite end.
fn power_at_infinity(pool: &Pool, e: Expr, x: Symbol) -> Option<Rational> {
    let range = pool.range(x);
    let ends = [(range.lower, Side::Lower), (range.upper, Side::Upper)];
    let powers = ends
        .into_iter()
        .filter(|(end, _)| end.value().is_none())
        .filter_map(|(end, side)| match at_end(pool, e, x, end, side) {
            Leading::Term { exponent, .. } => Some(-exponent),
            Leading::Zero | Leading::Unknown => None,
        });
    powers.max()
}

/// Whether a formula is certainly bounded: free of the symbols, or a function of one of them with
/// finite limits at both ends (formulas here are continuous inside).
fn is_bounded(pool: &Pool, e: Expr, symbols: &[Symbol]) -> bool {
    let mentioned: Vec<Symbol> = symbols
        .iter()
        .copied()
        .filter(|&s| pool.depends_on(e, s))
        .collect();
    match mentioned[..] {
        [] => true,
        [symbol] => {
            let whole = pool.range(symbol) == Interval::REAL;
            has_finite_ends(pool, e, symbol)
                || whole && {
                    let (written, exponential) = in_exponential(pool, e, symbol);
                    has_finite_ends(pool, written, exponential)
                }
        }
        _ => false,
    }
}

/// Whether a formula stays finite at both ends of a symbol's range.
fn has_finite_ends(pool: &Pool, e: Expr, symbol: Symbol) -> bool {
    let range = pool.range(symbol);
    let ends = [(range.lower, Side::Lower), (range.upper, Side::Upper)];
    ends.into_iter()
        .all(|(end, side)| match at_end(pool, e, symbol, end, side) {
            Leading::Zero => true,
            Leading::Term { exponent, .. } => exponent >= Rational::ZERO,
            Leading::Unknown => false,
        })
}

/// A formula in `exp(x)` instead of x, a positive number: what reads x through exponentials alone, such as a
/// logistic function, is rational in it.
fn in_exponential(pool: &Pool, e: Expr, x: Symbol) -> (Expr, Symbol) {
    let exponential = pool.symbol("exponential of a coordinate", SymbolKind::Auxiliary);
    let positive = Interval {
        lower: Bound::Open(pool.zero()),
        upper: Bound::Infinite,
    };
    pool.set_ranges([(exponential, positive)]);
    let back = [(x, pool.log(pool.var(exponential)))].into_iter().collect();
    (pool.simplify(pool.substitute(e, &back)), exponential)
}
