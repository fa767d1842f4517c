//! Where the values of a formula lie, from the ranges of its symbols.

use std::collections::BTreeMap;

use super::big::{self, Big, PRECISION};
use super::enclosure::{Enclosure, End};
use super::facts::{Bound, Sign};
use super::function::Function;
use super::node::{Expr, Node, Rational};
use super::pool::Pool;

/// How deep sums and products are looked into.
const MAX_DEPTH: usize = 12;

/// Twelfths of pi, and the square of a function there, as a fraction.
type Twelfths = (i64, i64, i64);

/// Squares of the sine at pi/6, pi/4, pi/3 and pi/2.
const SINES: [Twelfths; 4] = [(2, 1, 4), (3, 1, 2), (4, 3, 4), (6, 1, 1)];

/// Squares of the tangent at pi/6, pi/4 and pi/3.
const TANGENTS: [Twelfths; 3] = [(2, 1, 3), (3, 1, 1), (4, 3, 1)];

impl Pool {
    /// Where the values of a formula lie; `budget` as for signs.
    pub(super) fn enclosure(&self, e: Expr, budget: usize) -> Enclosure {
        self.enclosure_at(e, budget, MAX_DEPTH)
    }

    fn enclosure_at(&self, e: Expr, budget: usize, depth: usize) -> Enclosure {
        let inner = |part: Expr| match depth {
            0 => Enclosure::UNKNOWN,
            _ => self.enclosure_at(part, budget, depth - 1),
        };
        let point = |end: End| Enclosure::between(end.clone(), end);
        match &*self.node(e) {
            Node::Number(value) => point(End::number(1, false).times(value)),
            Node::Pi => point(End::turns(1, 1, false)),
            Node::Symbol(symbol) => {
                let range = self.range(*symbol);
                let known = Enclosure {
                    lower: self.end(range.lower),
                    upper: self.end(range.upper),
                };
                if known == Enclosure::UNKNOWN {
                    return Enclosure::of_sign(self.bounded_sign(e, budget));
                }
                known
            }
            Node::Sum(terms) => terms
                .iter()
                .map(|&term| inner(term))
                .reduce(|a, b| a.plus(&b))
                .unwrap_or(Enclosure::UNKNOWN),
            Node::Product(factors) if self.as_number(factors[0]).is_some() => {
                let number = self.as_number(factors[0]).unwrap_or_default();
                inner(self.without_coefficient(factors)).times(&number)
            }
            _ if self.inner.borrow().entry(e).rank == 0 => self.bracket(e),
            Node::Call(function, arguments) => self.enclosed_call(e, *function, arguments, budget),
            _ => Enclosure::of_sign(self.bounded_sign(e, budget)),
        }
    }

    fn enclosed_call(
        &self,
        e: Expr,
        function: Function,
        arguments: &[Expr],
        budget: usize,
    ) -> Enclosure {
        let quarter = |open| Enclosure::within_turns(1, 2, open);
        match function {
            Function::NormalCdf => Enclosure::open(0, 1),
            Function::Erf | Function::Tanh => Enclosure::open(-1, 1),
            Function::Asin => self.narrowed(quarter(false), arguments[0], &SINES, budget),
            Function::Atan => self.narrowed(quarter(true), arguments[0], &TANGENTS, budget),
            Function::Acos => self
                .narrowed(quarter(false), arguments[0], &SINES, budget)
                .times(&Rational::from(-1))
                .quarter_turn_on(),
            _ => Enclosure::of_sign(self.bounded_sign(e, budget)),
        }
    }

    /// The values of an inverse sine or tangent, narrowed by where its argument lies beside the values
    /// of the function at multiples of pi/12.
    fn narrowed(
        &self,
        whole: Enclosure,
        argument: Expr,
        squares: &[Twelfths],
        budget: usize,
    ) -> Enclosure {
        if budget == 0 {
            return whole;
        }
        let mut result = whole;
        let below = squares.iter().rev().map(|&(turns, p, q)| (-turns, p, q));
        for (turns, p, q) in below.chain([(0, 0, 1)]).chain(squares.iter().copied()) {
            let size = self.sqrt(self.ratio(p, q));
            let point = if turns < 0 { self.neg(size) } else { size };
            let gap = self.sub(argument, point);
            let sign = match self.bounded_sign(gap, budget - 1) {
                Sign::Unknown => self.enclosure(gap, budget - 1).sign(),
                known => known,
            };
            if sign.is_non_negative() {
                result.lower = Some(End::turns(turns, 12, sign.is_positive()));
            }
            if sign.is_non_positive() {
                result.upper = Some(End::turns(turns, 12, sign.is_non_zero()));
                break;
            }
        }
        result
    }

    /// The end of a range, if it is made of numbers and pi.
    fn end(&self, bound: Bound) -> Option<End> {
        let e = bound.value()?;
        let open = matches!(bound, Bound::Open(_));
        self.exact_end(e).map(|end| End { open, ..end })
    }

    /// `number + turns*pi`, if the formula is of that form.
    fn exact_end(&self, e: Expr) -> Option<End> {
        match &*self.node(e) {
            Node::Number(value) => Some(End::number(1, false).times(value)),
            Node::Pi => Some(End::turns(1, 1, false)),
            Node::Product(factors) => match factors[..] {
                [number, rest] => Some(self.exact_end(rest)?.times(&self.as_number(number)?)),
                _ => None,
            },
            Node::Sum(terms) => terms
                .iter()
                .map(|&term| self.exact_end(term))
                .reduce(|a, b| Some(a?.plus(&b?)))?,
            _ => None,
        }
    }

    /// Ends a little below and above the value of a formula without symbols.
    fn bracket(&self, e: Expr) -> Enclosure {
        let scale = 1e12;
        let value = self
            .constant_value_at(e, PRECISION)
            .map(|value| big::to_f64(&value) * scale)
            .filter(|value| value.abs() < 1e27);
        let Some(value) = value else {
            return Enclosure::UNKNOWN;
        };
        // A double carries 53 bits: the margin covers its rounding and that of the evaluation.
        let margin = 1.0 + value.abs() * 1e-12;
        let end = |value: f64| End {
            number: Rational::from_parts((value as i128).into(), (scale as u64).into()),
            turns: Rational::ZERO,
            open: true,
        };
        Enclosure::between(end((value - margin).floor()), end((value + margin).ceil()))
    }

    /// The value of a formula without symbols, if it comes out the same with 128 bits more.
    pub(super) fn constant_value_at(&self, e: Expr, precision: usize) -> Option<Big> {
        let nothing = BTreeMap::new();
        let value = |bits| self.eval_precise(&[e], &nothing, bits)?.pop();
        let (rough, fine) = (value(precision)?, value(precision + 128)?);
        super::zero::is_settled(&rough, &fine).then_some(fine)
    }
}
