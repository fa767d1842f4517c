//! Numbers at the parameters' default values, for checks that need no algebra.

use std::collections::BTreeMap;

use crate::symbolic::{Bound, Expr, Interval, Pool, Rational, Symbol};

/// Default values of parameters.
pub(super) struct Numbers {
    pool: Pool,
    defaults: BTreeMap<Symbol, f64>,
}

/// Which numbers a comparison rests on.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Basis {
    /// Numbers written in the file.
    Literal,
    /// Default values of parameters.
    Defaults,
}

impl Numbers {
    pub(super) fn new(pool: Pool) -> Self {
        Self {
            pool,
            defaults: BTreeMap::new(),
        }
    }

    pub(super) fn set(&mut self, parameter: Symbol, value: &Rational) {
        self.defaults.insert(parameter, value.to_f64().value());
    }

    /// The default values.
    pub(super) fn defaults(&self) -> &BTreeMap<Symbol, f64> {
        &self.defaults
    }

    /// The value at the default values, and whether it needs them.
    pub(super) fn value(&self, e: Expr) -> Option<(f64, Basis)> {
        let value = self.pool.eval_f64(e, &self.defaults)?;
        let literal = self.pool.symbols_of(e).is_empty();
        Some((
            value,
            if literal {
                Basis::Literal
            } else {
                Basis::Defaults
            },
        ))
    }

    /// Whether a value lies outside an interval; none where it lies inside or cannot be told. Two
    /// numbers are compared exactly.
    pub(super) fn outside(&self, value: Expr, interval: &Interval) -> Option<Basis> {
        let below = self.beyond(value, interval.lower, |value, end| value < end);
        below.or_else(|| self.beyond(value, interval.upper, |value, end| value > end))
    }

    fn beyond(&self, value: Expr, bound: Bound, out: fn(f64, f64) -> bool) -> Option<Basis> {
        let (end, closed) = match bound {
            Bound::Infinite => return None,
            Bound::Open(end) => (end, false),
            Bound::Closed(end) => (end, true),
        };
        if value == end {
            return (!closed).then_some(Basis::Literal);
        }
        if let (Some(value), Some(end)) = (self.pool.as_number(value), self.pool.as_number(end)) {
            let order = value.cmp(&end);
            let beyond = out(f64::from(order as i8), 0.0);
            return beyond.then_some(Basis::Literal);
        }
        let (value, first) = self.value(value)?;
        let (end, second) = self.value(end)?;
        let basis = if first == Basis::Literal {
            second
        } else {
            first
        };
        (out(value, end) || (value == end && !closed)).then_some(basis)
    }
}

/// A number for people, to six digits.
pub(super) fn short(value: f64) -> String {
    format!("{value:.5e}")
        .parse::<f64>()
        .unwrap_or(value)
        .to_string()
}
