//! The values of formulas at two fixed points, remembered: what many questions are settled by before
//! algebra is asked.

use super::ball::Ball;
use super::facts::{Bound, Interval};
use super::node::{Expr, Node, Symbol};
use super::pool::Pool;
use super::zero::Witness;

/// The points, as fractions of the unit interval from which the symbols are spread.
const STARTS: [f64; 2] = [0.271, 0.694];

/// The fractional part of the golden ratio keeps symbols of one point apart from each other.
const STRIDE: f64 = 0.618_033_988_749_894_9;

/// Ends of ranges that name other symbols are followed this far.
const MAX_ENDS: usize = 4;

impl Pool {
    /// Whether the formula certainly takes different values within the ranges of its symbols.
    pub(super) fn varies(&self, e: Expr) -> bool {
        let [here, there] = self.probe(e, MAX_ENDS);
        here.is_apart_from(there)
    }

    /// A point at which two formulas certainly differ, as far as double precision can tell.
    pub(super) fn apart(&self, a: Expr, b: Expr) -> Option<Witness> {
        let (left, right) = (self.probe(a, MAX_ENDS), self.probe(b, MAX_ENDS));
        let at = (0..STARTS.len()).find(|&i| left[i].is_apart_from(right[i]))?;
        let mut symbols = self.symbols_of(a);
        symbols.extend(self.symbols_of(b));
        symbols.sort_unstable();
        symbols.dedup();
        let value = |&symbol: &Symbol| {
            let [first, second] = self.probe(self.var(symbol), MAX_ENDS);
            (symbol, [first, second][at].value)
        };
        Some(Witness {
            point: symbols.iter().map(value).collect(),
            left: left[at].value,
            right: right[at].value,
        })
    }

    /// The formula at the two points.
    fn probe(&self, e: Expr, ends: usize) -> [Ball; 2] {
        let known = |part: Expr| self.inner.borrow().probes.get(&part).copied();
        for part in self.postorder_where(e, |part| known(part).is_none()) {
            let values = self.node_probe(&self.node(part), ends);
            self.inner.borrow_mut().probes.insert(part, values);
        }
        known(e).unwrap_or([Ball::UNKNOWN; 2])
    }

    fn node_probe(&self, node: &Node, ends: usize) -> [Ball; 2] {
        if let Node::Symbol(symbol) = node {
            return self.symbol_probe(*symbol, ends);
        }
        let inner = self.inner.borrow();
        let at = |e: &Expr, i: usize| inner.probes.get(e).map_or(Ball::UNKNOWN, |b| b[i]);
        [0, 1].map(|i| match node {
            Node::Number(value) => Ball::number(value),
            Node::Pi => Ball::pi(),
            Node::Symbol(_) => Ball::UNKNOWN,
            Node::Sum(terms) => terms
                .iter()
                .fold(Ball::exact(0.0), |sum, t| sum.plus(at(t, i))),
            Node::Product(factors) => factors
                .iter()
                .fold(Ball::exact(1.0), |product, f| product.times(at(f, i))),
            Node::Power(base, exponent) => match &*inner.entry(*exponent).node {
                Node::Number(n) => at(base, i).to_number(n),
                _ => at(base, i).to_power(at(exponent, i)),
            },
            Node::Call(function, arguments) => match arguments[..] {
                [a] => at(&a, i).of(*function),
                [a, b] => at(&a, i).chosen(*function, at(&b, i)),
                _ => Ball::UNKNOWN,
            },
        })
    }

    /// Doubles strictly inside the range of a symbol.
    fn symbol_probe(&self, symbol: Symbol, ends: usize) -> [Ball; 2] {
        let Interval { lower, upper } = self.range(symbol);
        let end = |bound: Bound| match (bound.value(), ends.checked_sub(1)) {
            (None, _) => Some(None),
            (Some(_), None) => None,
            (Some(e), Some(ends)) => Some(Some(self.probe(e, ends))),
        };
        let (Some(lower), Some(upper)) = (end(lower), end(upper)) else {
            return [Ball::UNKNOWN; 2];
        };
        [0, 1].map(|i| {
            let share = (STARTS[i] + STRIDE * f64::from(symbol.0)).fract();
            inside(lower.map(|b| b[i]), upper.map(|b| b[i]), 0.1 + 0.8 * share)
        })
    }
}

/// A double between two ends, certainly: at a share of the way, or at a moderate distance from the only
/// end.
fn inside(lower: Option<Ball>, upper: Option<Ball>, share: f64) -> Ball {
    let value = match (lower, upper) {
        (None, None) => 4.0 * share - 2.0,
        (Some(a), None) => a.value + share / (1.0 - share),
        (None, Some(b)) => b.value - share / (1.0 - share),
        (Some(a), Some(b)) => a.value + share * (b.value - a.value),
    };
    let point = Ball::exact(value);
    let above = lower.is_none_or(|a| value > a.value && point.is_apart_from(a));
    let below = upper.is_none_or(|b| value < b.value && point.is_apart_from(b));
    if above && below && value.is_finite() {
        point
    } else {
        Ball::UNKNOWN
    }
}
