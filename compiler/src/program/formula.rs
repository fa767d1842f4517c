//! Formulas to values: what is the same on all lanes is combined first, products are added with a
//! multiply-add.

use std::collections::{BTreeMap, BTreeSet, HashMap};

use super::builder::Builder;
use super::functions::{BinaryOp, UnaryOp};
use super::op::ValueId;
use super::rate::Rate;
use crate::symbolic::{Expr, Function, Node, Pool, Rational, Symbol};

/// Integer exponents up to this are multiplied out.
const LARGEST_MULTIPLIED_POWER: u32 = 64;

/// What the symbols of a formula stand for, and the formulas already lowered under it.
#[derive(Default)]
pub(super) struct Environment {
    bindings: BTreeMap<Symbol, ValueId>,
    memo: HashMap<Expr, ValueId>,
}

impl Environment {
    pub(super) fn new(bindings: BTreeMap<Symbol, ValueId>) -> Self {
        Self {
            bindings,
            memo: HashMap::new(),
        }
    }

    /// Says what one more symbol stands for, before a formula mentions it.
    pub(super) fn bind(&mut self, symbol: Symbol, value: ValueId) {
        self.bindings.insert(symbol, value);
    }
}

/// A summand: the value itself or the product of two values, and whether it is subtracted.
struct Term {
    negative: bool,
    factors: (ValueId, Option<ValueId>),
}

/// Lowers formulas of one pool under one environment.
pub(super) struct Formulas<'a> {
    pub(super) pool: &'a Pool,
    pub(super) builder: &'a mut Builder,
    pub(super) environment: &'a mut Environment,
}

impl Formulas<'_> {
    /// The value of a formula. Works through the formula bottom up, so that its depth does not matter.
    pub(super) fn lower(&mut self, formula: Expr) -> ValueId {
        for expr in self.missing(formula) {
            let id = self.node(expr);
            self.environment.memo.insert(expr, id);
        }
        self.environment.memo[&formula]
    }

    /// The sub-formulas without a value yet, operands first.
    fn missing(&self, formula: Expr) -> BTreeSet<Expr> {
        let mut found = BTreeSet::new();
        let mut stack = vec![formula];
        while let Some(expr) = stack.pop() {
            if !self.environment.memo.contains_key(&expr) && found.insert(expr) {
                self.pool
                    .node(expr)
                    .for_each_child(|child| stack.push(child));
            }
        }
        found
    }

    fn known(&self, expr: Expr) -> ValueId {
        self.environment.memo[&expr]
    }

    fn node(&mut self, expr: Expr) -> ValueId {
        match &*self.pool.node(expr) {
            Node::Number(value) => self.builder.number(nearest(value)),
            Node::Pi => self.builder.number(std::f64::consts::PI),
            Node::Symbol(symbol) => self.symbol(*symbol),
            Node::Sum(terms) => self.sum(terms),
            Node::Product(_) => {
                let term = self.term(expr);
                self.value_of(&term)
            }
            Node::Power(base, exponent) => self.power(*base, *exponent),
            Node::Call(function, arguments) => self.call(*function, arguments),
        }
    }

    fn symbol(&self, symbol: Symbol) -> ValueId {
        *self.environment.bindings.get(&symbol).unwrap_or_else(|| {
            panic!(
                "`{}` has no value in this part of the step program",
                self.pool.symbol_name(symbol)
            )
        })
    }

    fn call(&mut self, function: Function, arguments: &[Expr]) -> ValueId {
        let first = self.known(arguments[0]);
        match (function, UnaryOp::of(function)) {
            (_, Some(op)) => self.builder.unary(op, first),
            (Function::Min, None) => self.binary_call(BinaryOp::Min, first, arguments),
            (_, None) => self.binary_call(BinaryOp::Max, first, arguments),
        }
    }

    fn binary_call(&mut self, op: BinaryOp, first: ValueId, arguments: &[Expr]) -> ValueId {
        let second = self.known(arguments[1]);
        self.builder.binary(op, first, second)
    }

    fn power(&mut self, base: Expr, exponent: Expr) -> ValueId {
        match self.pool.as_number(exponent) {
            Some(number) if number < Rational::ZERO => {
                let denominator = self.number_power(base, &-number, exponent, true);
                let one = self.builder.number(1.0);
                self.builder.div(one, denominator)
            }
            Some(number) => self.number_power(base, &number, exponent, false),
            None => {
                let (base, exponent) = (self.known(base), self.known(exponent));
                self.builder.binary(BinaryOp::Pow, base, exponent)
            }
        }
    }

    /// `base^number` for `number >= 0`: by multiplications where it is an integer, with a square root
    /// where it is half of one. `negated`: the exponent stood with a minus sign.
    fn number_power(
        &mut self,
        base: Expr,
        number: &Rational,
        exponent: Expr,
        negated: bool,
    ) -> ValueId {
        let doubled = u32::try_from((number * Rational::from(2)).trunc());
        let halves = doubled.ok().filter(|&n| {
            Rational::from(n) == number * Rational::from(2) && n <= 2 * LARGEST_MULTIPLIED_POWER
        });
        let base = self.known(base);
        let Some(halves) = halves else {
            let exponent = self.known(exponent);
            let exponent = if negated {
                self.builder.neg(exponent)
            } else {
                exponent
            };
            return self.builder.binary(BinaryOp::Pow, base, exponent);
        };
        if halves % 2 == 0 {
            return self.builder.integer_power(base, halves / 2);
        }
        let root = self.builder.sqrt(base);
        if halves == 1 {
            return root;
        }
        let whole = self.builder.integer_power(base, halves / 2);
        self.builder.mul(whole, root)
    }

    /// A product as a summand: sign, and the two factors a multiply-add takes.
    fn term(&mut self, expr: Expr) -> Term {
        let node = self.pool.node(expr);
        let Node::Product(factors) = &*node else {
            return Term {
                negative: false,
                factors: (self.known(expr), None),
            };
        };
        let mut negative = false;
        let mut up: BTreeMap<Rate, Vec<ValueId>> = BTreeMap::new();
        let mut down: BTreeMap<Rate, Vec<ValueId>> = BTreeMap::new();
        for &factor in factors {
            let (id, side) = match &*self.pool.node(factor) {
                Node::Number(value) => {
                    negative = *value < Rational::ZERO;
                    let size = if negative {
                        -value.clone()
                    } else {
                        value.clone()
                    };
                    (self.builder.number(nearest(&size)), &mut up)
                }
                Node::Power(base, exponent) if self.is_negative(*exponent) => {
                    let number = self
                        .pool
                        .as_number(*exponent)
                        .expect("the exponent is a number");
                    (
                        self.number_power(*base, &-number, *exponent, true),
                        &mut down,
                    )
                }
                _ => (self.known(factor), &mut up),
            };
            side.entry(self.builder.rate(id)).or_default().push(id);
        }
        Term {
            negative,
            factors: self.combine(&mut up, &mut down),
        }
    }

    fn is_negative(&self, exponent: Expr) -> bool {
        self.pool
            .as_number(exponent)
            .is_some_and(|n| n < Rational::ZERO)
    }

    /// The two factors of a product: what is the same on all lanes, and what is not; or the last factor
    /// split off where all are lanes.
    fn combine(
        &mut self,
        up: &mut BTreeMap<Rate, Vec<ValueId>>,
        down: &mut BTreeMap<Rate, Vec<ValueId>>,
    ) -> (ValueId, Option<ValueId>) {
        let mut uniform: Option<ValueId> = None;
        for rate in Rate::ALL.into_iter().filter(|r| !r.is_lane()) {
            let above = up.remove(&rate).unwrap_or_default();
            let below = down.remove(&rate).unwrap_or_default();
            let numerator = uniform
                .into_iter()
                .chain(above)
                .reduce(|a, b| self.builder.mul(a, b));
            let denominator = below.into_iter().reduce(|a, b| self.builder.mul(a, b));
            uniform = self.quotient(numerator, denominator);
        }
        let uniform = uniform.filter(|&u| self.builder.constant_value(u) != Some(1.0));
        let mut above: Vec<ValueId> = std::mem::take(up).into_values().flatten().collect();
        let below: Vec<ValueId> = std::mem::take(down).into_values().flatten().collect();
        if below.is_empty() {
            let last = if uniform.is_none() && above.len() > 1 {
                above.pop()
            } else {
                None
            };
            let lanes = above.into_iter().reduce(|a, b| self.builder.mul(a, b));
            return match (uniform, lanes) {
                (Some(u), Some(lanes)) => (u, Some(lanes)),
                (Some(u), None) => (u, None),
                (None, Some(lanes)) => (lanes, last),
                (None, None) => (self.builder.number(1.0), None),
            };
        }
        let numerator = uniform
            .into_iter()
            .chain(above)
            .reduce(|a, b| self.builder.mul(a, b));
        let denominator = below.into_iter().reduce(|a, b| self.builder.mul(a, b));
        let quotient = self.quotient(numerator, denominator);
        (quotient.expect("a product has a factor"), None)
    }

    fn quotient(
        &mut self,
        numerator: Option<ValueId>,
        denominator: Option<ValueId>,
    ) -> Option<ValueId> {
        let Some(denominator) = denominator else {
            return numerator;
        };
        let numerator = numerator.unwrap_or_else(|| self.builder.number(1.0));
        Some(self.builder.div(numerator, denominator))
    }

    /// A term on its own.
    fn value_of(&mut self, term: &Term) -> ValueId {
        let (first, second) = term.factors;
        match (second, term.negative) {
            (None, false) => first,
            (None, true) => self.builder.neg(first),
            (Some(second), false) => self.builder.mul(first, second),
            (Some(second), true) => {
                let first = self.builder.neg(first);
                self.builder.mul(first, second)
            }
        }
    }

    /// A sum: rate by rate from the slowest, on lanes the single values first and then the products,
    /// each by a multiply-add.
    fn sum(&mut self, terms: &[Expr]) -> ValueId {
        let mut by_rate: BTreeMap<Rate, (Vec<Term>, Vec<Term>)> = BTreeMap::new();
        for &expr in terms {
            let term = self.term(expr);
            let (first, second) = term.factors;
            let rate = second
                .map_or(Rate::Constant, |s| self.builder.rate(s))
                .max(self.builder.rate(first));
            let (singles, products) = by_rate.entry(rate).or_default();
            if second.is_some() {
                products.push(term)
            } else {
                singles.push(term)
            }
        }
        let mut total: Option<ValueId> = None;
        for (mut singles, mut products) in by_rate.into_values() {
            if total.is_none() {
                // Starting from what is added spares the negation of what is subtracted.
                singles.sort_by_key(|term| term.negative);
                products.sort_by_key(|term| term.negative);
            }
            for term in singles.into_iter().chain(products) {
                total = Some(self.accumulate(total, &term));
            }
        }
        total.unwrap_or_else(|| self.builder.number(0.0))
    }

    fn accumulate(&mut self, total: Option<ValueId>, term: &Term) -> ValueId {
        let Some(total) = total else {
            return self.value_of(term);
        };
        let (first, second) = term.factors;
        match (second, term.negative) {
            (None, false) => self.builder.add(total, first),
            (None, true) => self.builder.sub(total, first),
            (Some(second), negative) => {
                let first = if negative {
                    self.builder.neg(first)
                } else {
                    first
                };
                self.builder.mul_add(first, second, total)
            }
        }
    }
}

/// The double nearest to a rational number.
pub(super) fn nearest(value: &Rational) -> f64 {
    value.to_f64().value()
}
