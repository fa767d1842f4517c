//! Bounds on how fast formulas grow in the coordinates: `|f| <= C (1 + |x|^d)` on finite horizons.
//!
//! If all coefficients of a system grow at most linearly, every moment of its solution is finite and
//! bounded on finite horizons (Khasminskii 2012, "Stochastic Stability of Differential Equations",
//! theorem 3.5; Karatzas and Shreve 1991, problem 5.3.15), so that stochastic integrals of formulas of
//! polynomial growth are true martingales.

use std::collections::BTreeMap;

use super::exp_poly::factors;
use crate::calculus::System;
use crate::symbolic::{Bound, Expr, Function, Node, Pool, Rational, Sign, Symbol};

/// Whether all coefficients of the given coordinates grow at most linearly.
pub(super) fn is_linear(system: &System<'_>, coordinates: &[usize]) -> bool {
    let one = Rational::ONE;
    coordinates.iter().all(|&i| {
        let process = &system.processes[i];
        let slow = |e: Expr| degree(system, e).is_some_and(|d| d <= one);
        slow(process.drift) && process.diffusion.iter().all(|&b| slow(b))
    })
}

/// Some `d` with `|f| <= C (1 + |x|^d)`, uniformly on finite horizons; none where no bound is found.
pub(super) fn degree(system: &System<'_>, formula: Expr) -> Option<Rational> {
    let pool = system.pool();
    let mut known: BTreeMap<Expr, Option<Rational>> = BTreeMap::new();
    for part in pool.postorder(formula) {
        let found = degree_of_node(system, part, &known);
        known.insert(part, found);
    }
    known.remove(&formula).flatten()
}

type Known = BTreeMap<Expr, Option<Rational>>;

fn degree_of_node(system: &System<'_>, part: Expr, known: &Known) -> Option<Rational> {
    let pool = system.pool();
    let of = |e: &Expr| known.get(e).cloned().flatten();
    match &*pool.node(part) {
        Node::Number(_) | Node::Pi => Some(Rational::ZERO),
        Node::Symbol(symbol) => Some(degree_of_symbol(system, *symbol)),
        Node::Sum(terms) => terms
            .iter()
            .map(of)
            .try_fold(Rational::ZERO, |d, e| Some(d.max(e?))),
        Node::Product(items) => items
            .iter()
            .map(of)
            .try_fold(Rational::ZERO, |d, e| Some(d + e?)),
        Node::Power(base, exponent) => degree_of_power(system, *base, *exponent, known),
        Node::Call(function, arguments) => {
            if is_fixed(system, part) {
                return Some(Rational::ZERO);
            }
            degree_of_call(pool, *function, arguments, known)
        }
    }
}

/// A state counts 1, unless its domain is bounded; everything else is bounded on finite horizons.
fn degree_of_symbol(system: &System<'_>, symbol: Symbol) -> Rational {
    if system.position(symbol).is_none() {
        return Rational::ZERO;
    }
    let range = system.pool().range(symbol);
    match (range.lower, range.upper) {
        (Bound::Infinite, _) | (_, Bound::Infinite) => Rational::ONE,
        _ => Rational::ZERO,
    }
}

fn degree_of_power(
    system: &System<'_>,
    base: Expr,
    exponent: Expr,
    known: &Known,
) -> Option<Rational> {
    let pool = system.pool();
    let of = |e: Expr| known.get(&e).cloned().flatten();
    if is_fixed(system, base) && is_fixed(system, exponent) {
        return Some(Rational::ZERO);
    }
    if let Some(n) = pool.as_number(exponent) {
        if n >= Rational::ZERO {
            return Some(of(base)? * n);
        }
        return is_away_from_zero(pool, base).then_some(Rational::ZERO);
    }
    // A bounded exponent over a fixed positive base.
    let bounded = of(exponent)? == Rational::ZERO && is_fixed(system, base);
    (bounded && pool.sign(base).is_positive()).then_some(Rational::ZERO)
}

fn degree_of_call(
    pool: &Pool,
    function: Function,
    arguments: &[Expr],
    known: &Known,
) -> Option<Rational> {
    let of = |e: Expr| known.get(&e).cloned().flatten();
    use Function::{
        Abs, Asinh, Atan, Cbrt, Cos, Erf, Exp, Log, Max, Min, NormalCdf, NormalPdf, Sin, Tanh,
    };
    match function {
        Sin | Cos | Tanh | Atan | Erf | NormalCdf | NormalPdf | Function::Sign => {
            Some(Rational::ZERO)
        }
        Abs | Asinh => of(arguments[0]),
        Cbrt => Some(of(arguments[0])? / Rational::from(3)),
        Min | Max => arguments
            .iter()
            .map(|&e| of(e))
            .try_fold(Rational::ZERO, |d, e| Some(d.max(e?))),
        Exp => {
            let falls = matches!(
                pool.sign(arguments[0]),
                Sign::NonPositive | Sign::Negative | Sign::Zero
            );
            let bounded = falls || of(arguments[0])? == Rational::ZERO;
            bounded.then_some(Rational::ZERO)
        }
        Log => is_away_from_zero(pool, arguments[0])
            .then(|| of(arguments[0]))
            .flatten(),
        _ => None,
    }
}

/// Whether neither states nor time occur, so that the value is one number per parameter set. (A
/// formula in time alone may have a pole on the horizon, so it is looked into.)
fn is_fixed(system: &System<'_>, e: Expr) -> bool {
    let pool = system.pool();
    let time = system.model.time;
    !pool
        .symbols_of(e)
        .into_iter()
        .any(|s| s == time || system.position(s).is_some())
}

/// Whether the formula is a positive fixed term plus terms that are never negative.
fn is_away_from_zero(pool: &Pool, e: Expr) -> bool {
    use crate::symbolic::SymbolKind::Parameter;
    let Node::Sum(terms) = &*pool.node(e) else {
        // A power or an exponential of something bounded would do too; products of such terms as well.
        return factors(pool, e).iter().all(|&f| {
            let fixed = pool
                .symbols_of(f)
                .into_iter()
                .all(|s| pool.symbol_kind(s) == Parameter);
            fixed || matches!(&*pool.node(f), Node::Power(b, _) if is_away_from_zero(pool, *b))
        });
    };
    let fixed = |t: &&Expr| {
        pool.symbols_of(**t)
            .into_iter()
            .all(|s| pool.symbol_kind(s) == Parameter)
    };
    terms.iter().all(|&t| pool.sign(t).is_non_negative())
        && terms
            .iter()
            .filter(fixed)
            .any(|&t| pool.sign(t).is_positive())
}
