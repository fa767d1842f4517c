//! Evaluation of formulas at a point, in double and in high precision.

use std::collections::BTreeMap;

use super::big::{self, Big, PRECISION};
use super::function::Function;
use super::node::{Expr, Node, Symbol};
use super::pool::{Pool, Table};

impl Pool {
    /// The value in double precision; none where a symbol has no value or the formula has none (a
    /// division by zero, the logarithm of a negative number, an overflow).
    pub fn eval_f64(&self, e: Expr, values: &BTreeMap<Symbol, f64>) -> Option<f64> {
        let mut done: Table<Expr, f64> = Table::default();
        for part in self.postorder(e) {
            let value = match &*self.node(part) {
                Node::Number(value) => value.to_f64().value(),
                Node::Pi => std::f64::consts::PI,
                Node::Symbol(symbol) => *values.get(symbol)?,
                Node::Sum(terms) => terms.iter().map(|t| done[t]).sum(),
                Node::Product(factors) => factors.iter().map(|f| done[f]).product(),
                Node::Power(base, exponent) => power_f64(done[base], done[exponent]),
                Node::Call(f, a) if a.len() == 2 => binary_f64(*f, done[&a[0]], done[&a[1]]),
                Node::Call(f, a) => unary_f64(*f, done[&a[0]])?,
            };
            if !value.is_finite() {
                return None;
            }
            done.insert(part, value);
        }
        Some(done[&e])
    }

    /// The value at 256 bits; none where [`Pool::eval_f64`] would have none, or where the result is
    /// out of all proportion.
    pub fn eval_big(&self, e: Expr, values: &BTreeMap<Symbol, Big>) -> Option<Big> {
        self.eval_precise(&[e], values, PRECISION)?.pop()
    }

    /// The value with every operation carried out at the given number of bits.
    pub(super) fn eval_precise(
        &self,
        formulas: &[Expr],
        values: &BTreeMap<Symbol, Big>,
        precision: usize,
    ) -> Option<Vec<Big>> {
        let mut done: Table<Expr, Big> = Table::default();
        for part in self.postorder_of(formulas, |_| true) {
            let value = match &*self.node(part) {
                Node::Number(value) => big::from_rational(value, precision),
                Node::Pi => Big::pi(precision),
                Node::Symbol(symbol) => values.get(symbol)?.clone(),
                Node::Sum(terms) => terms
                    .iter()
                    .fold(big::whole(0, precision), |sum, t| sum + &done[t]),
                Node::Product(factors) => factors
                    .iter()
                    .fold(big::whole(1, precision), |product, f| product * &done[f]),
                Node::Power(base, exponent) => big::pow(
                    &done[base],
                    &done[exponent],
                    self.as_number(*exponent).as_ref(),
                )?,
                Node::Call(f, a) if a.len() == 2 => big::binary(*f, &done[&a[0]], &done[&a[1]])?,
                Node::Call(f, a) => big::unary(*f, &done[&a[0]])?,
            };
            done.insert(part, value.with_precision(precision).value());
        }
        formulas.iter().map(|e| done.get(e).cloned()).collect()
    }
}

fn power_f64(base: f64, exponent: f64) -> f64 {
    if exponent == 0.5 {
        base.sqrt()
    } else {
        base.powf(exponent)
    }
}

fn binary_f64(function: Function, a: f64, b: f64) -> f64 {
    match function {
        Function::Min => {
            if a < b {
                a
            } else {
                b
            }
        }
        Function::Max => {
            if a > b {
                a
            } else {
                b
            }
        }
        _ => f64::NAN,
    }
}

fn unary_f64(function: Function, x: f64) -> Option<f64> {
    use Function::*;
    Some(match function {
        Exp => x.exp(),
        Log => x.ln(),
        Sqrt => x.sqrt(),
        Abs => x.abs(),
        Sin => x.sin(),
        Cos => x.cos(),
        Tan => x.tan(),
        Asin => x.asin(),
        Acos => x.acos(),
        Atan => x.atan(),
        Sinh => x.sinh(),
        Cosh => x.cosh(),
        Tanh => x.tanh(),
        Asinh => x.asinh(),
        Acosh => x.acosh(),
        Atanh => x.atanh(),
        Cbrt => x.cbrt(),
        Sign if x == 0.0 => 0.0,
        Sign => x.signum(),
        NormalPdf => (-0.5 * x * x).exp() / (2.0 * std::f64::consts::PI).sqrt(),
        Expm1Ratio if x == 0.0 => 1.0,
        Expm1Ratio => x.exp_m1() / x,
        // Saturated well before the high-precision series ends.
        Erf | NormalCdf if x > 40.0 => 1.0,
        Erf if x < -40.0 => -1.0,
        NormalCdf if x < -40.0 => 0.0,
        Erf | NormalCdf | NormalQuantile => {
            let x = Big::try_from(x).ok()?.with_precision(PRECISION).value();
            big::to_f64(&big::unary(function, &x)?)
        }
        Min | Max => return None,
    })
}
