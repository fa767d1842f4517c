//! What the ranges of its symbols say of the sign of a formula.

use std::cmp::Ordering;
use std::collections::BTreeMap;

use dashu_base::BitTest;

use super::big::{self, PRECISION};
use super::facts::{Bound, Sign};
use super::function::Function;
use super::node::{Expr, Node, Rational, Symbol};
use super::pool::Pool;

/// How often a sum may be replaced by its value at the end of a range.
const MAX_SUBSTITUTIONS: usize = 4;

impl Sign {
    /// The sign of a number.
    pub fn of(value: &Rational) -> Sign {
        match value.cmp(&Rational::ZERO) {
            Ordering::Less => Sign::Negative,
            Ordering::Equal => Sign::Zero,
            Ordering::Greater => Sign::Positive,
        }
    }

    /// Whether it excludes zero.
    pub fn is_non_zero(self) -> bool {
        matches!(self, Sign::Positive | Sign::Negative)
    }

    /// Zero or less, for certain.
    pub fn is_non_positive(self) -> bool {
        matches!(self, Sign::Negative | Sign::NonPositive | Sign::Zero)
    }

    /// The sign of the negative.
    pub fn negate(self) -> Sign {
        match self {
            Sign::Positive => Sign::Negative,
            Sign::NonNegative => Sign::NonPositive,
            Sign::NonPositive => Sign::NonNegative,
            Sign::Negative => Sign::Positive,
            same => same,
        }
    }

    /// The sign of a sum.
    pub fn plus(self, other: Sign) -> Sign {
        use Sign::*;
        match (self, other) {
            (Zero, s) | (s, Zero) => s,
            (Positive, s) | (s, Positive) if s.is_non_negative() => Positive,
            (Negative, s) | (s, Negative) if s.is_non_positive() => Negative,
            (NonNegative, NonNegative) => NonNegative,
            (NonPositive, NonPositive) => NonPositive,
            _ => Unknown,
        }
    }

    /// The sign of a product.
    pub fn times(self, other: Sign) -> Sign {
        use Sign::*;
        match (self, other) {
            (Zero, _) | (_, Zero) => Zero,
            (Unknown, _) | (_, Unknown) => Unknown,
            (Positive, s) | (s, Positive) => s,
            (Negative, s) | (s, Negative) => s.negate(),
            (NonNegative, s) | (s, NonNegative) => s,
            (NonPositive, NonPositive) => NonNegative,
        }
    }
}

impl Pool {
    /// What is known of the sign of the formula wherever it has a value, from the ranges of its
    /// symbols.
    pub fn sign(&self, e: Expr) -> Sign {
        self.bounded_sign(e, MAX_SUBSTITUTIONS)
    }

    /// The sign, replacing sums by their values at ends of ranges at most `budget` deep.
    pub(super) fn bounded_sign(&self, e: Expr, budget: usize) -> Sign {
        let known = |part: &Expr| self.inner.borrow().signs.get(part).copied();
        if let Some((sign, spent)) = known(&e)
            && spent >= budget
        {
            return sign;
        }
        for part in self.postorder_where(e, |part| {
            known(&part).is_none_or(|(_, spent)| spent < budget)
        }) {
            let sign = self.node_sign(part, budget);
            self.inner.borrow_mut().signs.insert(part, (sign, budget));
        }
        known(&e).map_or(Sign::Unknown, |(sign, _)| sign)
    }

    fn known_sign(&self, e: Expr) -> Sign {
        self.inner
            .borrow()
            .signs
            .get(&e)
            .map_or(Sign::Unknown, |&(sign, _)| sign)
    }

    fn node_sign(&self, e: Expr, budget: usize) -> Sign {
        let sign = |part: &Expr| self.known_sign(*part);
        match &*self.node(e) {
            Node::Number(value) => Sign::of(value),
            Node::Pi => Sign::Positive,
            Node::Symbol(symbol) => self.symbol_sign(*symbol, budget),
            Node::Sum(terms) => match terms.iter().map(sign).reduce(Sign::plus) {
                Some(known) if known != Sign::Unknown => known,
                _ if self.inner.borrow().entry(e).rank == 0 => self.constant_sign(e),
                _ => self.sign_from_ends(e, budget),
            },
            Node::Product(factors) => factors.iter().map(sign).fold(Sign::Positive, Sign::times),
            Node::Power(base, exponent) => power_sign(
                sign(base),
                sign(exponent),
                self.as_number(*exponent).as_ref(),
            ),
            Node::Call(function, a) => self.call_sign(*function, a, budget),
        }
    }

    /// The sign of a number that is written as a formula, from its digits; zero shows as unknown.
    fn constant_sign(&self, e: Expr) -> Sign {
        match self.constant_value_at(e, PRECISION) {
            Some(value) if big::is_negative(&value) => Sign::Negative,
            Some(_) => Sign::Positive,
            None => Sign::Unknown,
        }
    }

    /// The sign of a circular function, from where its argument lies.
    fn circular_sign(&self, function: Function, argument: Expr, budget: usize) -> Sign {
        if budget == 0 {
            return Sign::Unknown;
        }
        let enclosure = self.enclosure(argument, budget - 1);
        let sine = enclosure.sign_of_sine();
        let cosine = enclosure.quarter_turn_on().sign_of_sine();
        match function {
            Function::Sin => sine,
            Function::Cos => cosine,
            // Where the tangent has a value the cosine is not zero.
            _ if cosine.is_non_negative() => sine,
            _ if cosine.is_non_positive() => sine.negate(),
            _ => Sign::Unknown,
        }
    }

    fn symbol_sign(&self, symbol: Symbol, budget: usize) -> Sign {
        if budget == 0 {
            return Sign::Unknown;
        }
        let range = self.range(symbol);
        let end = |bound: Bound| {
            bound
                .value()
                .map_or(Sign::Unknown, |e| self.bounded_sign(e, budget - 1))
        };
        let (lower, upper) = (end(range.lower), end(range.upper));
        match (range.lower, range.upper) {
            (Bound::Open(_), _) if lower.is_non_negative() => Sign::Positive,
            (Bound::Closed(_), _) if lower.is_positive() => Sign::Positive,
            (_, Bound::Open(_)) if upper.is_non_positive() => Sign::Negative,
            (_, Bound::Closed(_)) if upper == Sign::Negative => Sign::Negative,
            (Bound::Closed(_), _) if lower.is_non_negative() => Sign::NonNegative,
            (_, Bound::Closed(_)) if upper.is_non_positive() => Sign::NonPositive,
            _ => Sign::Unknown,
        }
    }

    /// The sign of a formula that is monotone in a symbol, from its value at an end of the range.
    fn sign_from_ends(&self, e: Expr, budget: usize) -> Sign {
        if budget == 0 {
            return Sign::Unknown;
        }
        for &symbol in self.symbol_set(e).iter() {
            let range = self.range(symbol);
            if range == super::Interval::REAL {
                continue;
            }
            let slope = self.bounded_sign(self.derivative(e, symbol), budget - 1);
            let (least, greatest) = if slope.is_non_negative() {
                (range.lower, range.upper)
            } else if slope.is_non_positive() {
                (range.upper, range.lower)
            } else {
                continue;
            };
            let strict = slope.is_non_zero();
            let below = self.sign_at(e, symbol, least, budget - 1);
            if below.is_non_negative() {
                return end_sign(below, least, strict);
            }
            let above = self.sign_at(e, symbol, greatest, budget - 1);
            if above.is_non_positive() {
                return end_sign(above.negate(), greatest, strict).negate();
            }
        }
        Sign::Unknown
    }

    fn sign_at(&self, e: Expr, symbol: Symbol, end: Bound, budget: usize) -> Sign {
        let Some(value) = end.value() else {
            return Sign::Unknown;
        };
        let there = self.substitute(e, &BTreeMap::from([(symbol, value)]));
        self.bounded_sign(self.expand(there), budget)
    }

    fn call_sign(&self, function: Function, arguments: &[Expr], budget: usize) -> Sign {
        use super::function::Function as F;
        let a = self.known_sign(arguments[0]);
        match function {
            F::Exp | F::Cosh | F::NormalCdf | F::NormalPdf | F::Expm1Ratio => Sign::Positive,
            F::Log if budget > 0 => {
                self.bounded_sign(self.sub(arguments[0], self.one()), budget - 1)
            }
            F::Abs if a.is_non_zero() => Sign::Positive,
            F::Sqrt if a.is_positive() => Sign::Positive,
            F::Abs | F::Sqrt | F::Acos | F::Acosh => Sign::NonNegative,
            F::Asin
            | F::Atan
            | F::Sinh
            | F::Tanh
            | F::Asinh
            | F::Atanh
            | F::Cbrt
            | F::Erf
            | F::Sign => a,
            F::Max | F::Min => choice_sign(function, a, self.known_sign(arguments[1])),
            F::Sin | F::Cos | F::Tan => self.circular_sign(function, arguments[0], budget),
            F::Log | F::NormalQuantile => Sign::Unknown,
        }
    }
}

/// The sign of a monotone formula above its least value, which is `at_end` and zero or more.
fn end_sign(at_end: Sign, end: Bound, strict: bool) -> Sign {
    if at_end.is_positive() || (strict && matches!(end, Bound::Open(_))) {
        Sign::Positive
    } else {
        Sign::NonNegative
    }
}

fn power_sign(base: Sign, exponent: Sign, number: Option<&Rational>) -> Sign {
    let inverse = exponent == Sign::Negative;
    match number {
        // A division by zero has no sign, and no limit either that both sides share.
        _ if inverse && base == Sign::Zero => Sign::Unknown,
        Some(n) if n.is_int() => {
            let even = !n.numerator().bit(0);
            match base {
                _ if even && (inverse || base.is_non_zero()) => Sign::Positive,
                _ if even => Sign::NonNegative,
                // Where the inverse has a value the base is not zero.
                Sign::NonNegative if inverse => Sign::Positive,
                Sign::NonPositive if inverse => Sign::Negative,
                _ => base,
            }
        }
        Some(_) if inverse || base.is_positive() => Sign::Positive,
        Some(_) => Sign::NonNegative,
        None if base.is_positive() => Sign::Positive,
        None if base.is_non_negative() => Sign::NonNegative,
        None => Sign::Unknown,
    }
}

fn choice_sign(function: Function, a: Sign, b: Sign) -> Sign {
    if function == Function::Min {
        return choice_sign(Function::Max, a.negate(), b.negate()).negate();
    }
    match (a, b) {
        (Sign::Positive, _) | (_, Sign::Positive) => Sign::Positive,
        (a, b) if a.is_non_negative() || b.is_non_negative() => Sign::NonNegative,
        (Sign::Negative, Sign::Negative) => Sign::Negative,
        (a, b) if a.is_non_positive() && b.is_non_positive() => Sign::NonPositive,
        _ => Sign::Unknown,
    }
}
