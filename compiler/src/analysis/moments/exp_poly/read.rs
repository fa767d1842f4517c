//! Formulas in time as exponential polynomials.

use super::{ExpPoly, Term, Wave};
use crate::analysis::moments::affine::affine;
use crate::symbolic::{Expr, Function, Node, Pool, Rational, Symbol};

/// Higher powers of longer sums are not multiplied out.
const LARGEST_POWER_OF_A_SUM: u32 = 8;

impl ExpPoly {
    /// Reads a formula in time and parameters, free of anything else: sums of products of powers of
    /// `t`, and of exponentials, sines and cosines of affine functions of `t`.
    pub(in crate::analysis::moments) fn read(
        pool: &Pool,
        time: Symbol,
        formula: Expr,
    ) -> Option<Self> {
        if !pool.depends_on(formula, time) {
            return Some(Self::constant(pool, formula));
        }
        let mut result = Self::default();
        let one = Self::constant(pool, pool.one());
        for summand in summands(pool, pool.expand(formula)) {
            let mut product = one.clone();
            for factor in factors(pool, summand) {
                let factor = read_factor(pool, time, factor)?;
                let before = std::mem::take(&mut product);
                product.add_product(pool, &before, &factor);
            }
            result.add_product(pool, &one, &product);
        }
        Some(result)
    }
}

/// A factor in time and parameters.
fn read_factor(pool: &Pool, time: Symbol, factor: Expr) -> Option<ExpPoly> {
    let mut term = Term::constant(pool, pool.one());
    if !pool.depends_on(factor, time) {
        return Some(ExpPoly::constant(pool, factor));
    }
    if let Some(exponent) = exponent_of(pool, factor) {
        let exponent = affine(pool, exponent, &[time])?;
        term.coefficient = pool.exp(exponent.constant);
        term.rate = exponent.slopes[0];
        return Some(of_terms(pool, [term]));
    }
    match &*pool.node(factor) {
        Node::Symbol(_) => {
            term.power = 1;
            Some(of_terms(pool, [term]))
        }
        Node::Power(base, exponent) => {
            let power = small_power(pool.as_number(*exponent)?)?;
            if *base == pool.var(time) {
                term.power = power;
                return Some(of_terms(pool, [term]));
            }
            let base = ExpPoly::read(pool, time, *base)?;
            if base.terms.len() > 2 && power > LARGEST_POWER_OF_A_SUM {
                return None;
            }
            let mut product = ExpPoly::constant(pool, pool.one());
            for _ in 0..power {
                let before = std::mem::take(&mut product);
                product.add_product(pool, &before, &base);
            }
            Some(product)
        }
        Node::Call(function @ (Function::Cos | Function::Sin), arguments) => {
            read_wave(pool, time, *function, arguments[0])
        }
        _ => None,
    }
}

/// `cos(omega t + phi)` or `sin(omega t + phi)` by the addition theorems.
fn read_wave(pool: &Pool, time: Symbol, function: Function, argument: Expr) -> Option<ExpPoly> {
    let argument = affine(pool, argument, &[time])?;
    let (omega, phase) = (argument.slopes[0], argument.constant);
    let (cos, sin) = (
        pool.call(Function::Cos, &[phase]),
        pool.call(Function::Sin, &[phase]),
    );
    let parts = match function {
        Function::Cos => [(Wave::Cos(omega), cos), (Wave::Sin(omega), pool.neg(sin))],
        _ => [(Wave::Sin(omega), cos), (Wave::Cos(omega), sin)],
    };
    let term = Term::constant(pool, pool.one());
    let terms = parts.map(|(wave, coefficient)| Term {
        wave,
        coefficient,
        ..term
    });
    Some(of_terms(pool, terms))
}

fn of_terms<const N: usize>(pool: &Pool, terms: [Term; N]) -> ExpPoly {
    let mut result = ExpPoly::default();
    terms.into_iter().for_each(|term| result.push(pool, term));
    result
}

/// `x` of `exp(x)`, and of its powers.
pub(in crate::analysis::moments) fn exponent_of(pool: &Pool, factor: Expr) -> Option<Expr> {
    match &*pool.node(factor) {
        Node::Call(Function::Exp, arguments) => Some(arguments[0]),
        Node::Power(base, exponent) => {
            exponent_of(pool, *base).map(|inner| pool.mul(*exponent, inner))
        }
        _ => None,
    }
}

/// A small non-negative integer exponent.
pub(in crate::analysis::moments) fn small_power(number: Rational) -> Option<u32> {
    (0..=64_u32).find(|&n| number == Rational::from(n))
}

/// The terms of a sum; the formula itself where it is none.
pub(in crate::analysis::moments) fn summands(pool: &Pool, formula: Expr) -> Vec<Expr> {
    match &*pool.node(formula) {
        Node::Sum(terms) => terms.to_vec(),
        _ => vec![formula],
    }
}

/// The factors of a product; the formula itself where it is none.
pub(in crate::analysis::moments) fn factors(pool: &Pool, formula: Expr) -> Vec<Expr> {
    match &*pool.node(formula) {
        Node::Product(factors) => factors.to_vec(),
        _ => vec![formula],
    }
}
