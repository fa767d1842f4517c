//! Double precision with a bound of its error: what two formulas are told apart by before high
//! precision or algebra is asked.
//!
//! A ball holds the exact value of a formula at a point whose coordinates are doubles. Functions of
//! the platform's library are taken to be right to [`LIBRARY`] units in the last place, many times
//! what libraries in use reach.

use super::function::Function;
use super::node::Rational;

/// The relative rounding error of one operation.
const ROUNDING: f64 = f64::EPSILON;

/// The relative error granted to one call of a library function.
const LIBRARY: f64 = 16.0 * f64::EPSILON;

/// Covers the rounding of the bounds themselves.
const SLACK: f64 = 1.0 + 1e-9;

/// Covers results that underflow.
const TINY: f64 = 1e-290;

/// All numbers within `error` of `value`; an infinite error says nothing.
#[derive(Clone, Copy, PartialEq, Debug)]
pub(super) struct Ball {
    pub(super) value: f64,
    pub(super) error: f64,
}

impl Ball {
    pub(super) const UNKNOWN: Ball = Ball {
        value: 0.0,
        error: f64::INFINITY,
    };

    /// A ball from a value, the error its operands bring and the relative error of the operation.
    fn new(value: f64, brought: f64, relative: f64) -> Ball {
        let error = (brought + value.abs() * relative) * SLACK + TINY;
        if value.is_finite() && error.is_finite() {
            Ball { value, error }
        } else {
            Ball::UNKNOWN
        }
    }

    pub(super) fn exact(value: f64) -> Ball {
        Ball { value, error: 0.0 }
    }

    pub(super) fn number(value: &Rational) -> Ball {
        Ball::new(value.to_f64().value(), 0.0, ROUNDING)
    }

    pub(super) fn pi() -> Ball {
        Ball::new(std::f64::consts::PI, 0.0, ROUNDING)
    }

    /// Whether no number is in both.
    pub(super) fn is_apart_from(self, other: Ball) -> bool {
        (self.value - other.value).abs() > (self.error + other.error) * 2.0
    }

    /// Whether zero is outside, with room to spare.
    fn is_away_from_zero(self) -> bool {
        self.value.abs() > 2.0 * self.error
    }

    fn is_positive(self) -> bool {
        self.value > 0.0 && self.is_away_from_zero()
    }

    pub(super) fn plus(self, other: Ball) -> Ball {
        Ball::new(self.value + other.value, self.error + other.error, ROUNDING)
    }

    pub(super) fn times(self, other: Ball) -> Ball {
        let brought = self.value.abs() * other.error
            + other.value.abs() * self.error
            + self.error * other.error;
        Ball::new(self.value * other.value, brought, ROUNDING)
    }

    /// The power with a number; a base that may be zero or, for a broken exponent, negative says
    /// nothing.
    pub(super) fn to_number(self, exponent: &Rational) -> Ball {
        let n = exponent.to_f64().value();
        let whole = exponent.is_int() && n.abs() < 1e9;
        if !self.is_away_from_zero() || (self.value < 0.0 && !whole) {
            return Ball::UNKNOWN;
        }
        // |x + e|^n - |x|^n is at most |x|^n (exp(2 |n| e/|x|) - 1) for e <= |x|/2.
        let spread = (2.0 * n.abs() * self.error / self.value.abs()).exp_m1();
        // An exponent that is no double itself counts as one that was rounded.
        let rounded = (n * self.value.abs().ln()).abs() * ROUNDING;
        let value = self.value.powf(n);
        Ball::new(value, value.abs() * spread, LIBRARY + 2.0 * rounded)
    }

    /// The power of a positive base with any exponent.
    pub(super) fn to_power(self, exponent: Ball) -> Ball {
        exponent.times(self.of(Function::Log)).of(Function::Exp)
    }

    fn divided_by(self, other: Ball) -> Ball {
        self.times(other.to_number(&Rational::from(-1)))
    }

    /// The value of a function whose slope is at most `slope` around here.
    fn moved(self, value: f64, slope: f64) -> Ball {
        Ball::new(value, self.error * slope, LIBRARY)
    }

    /// A function of one argument; those without a simple bound say nothing.
    pub(super) fn of(self, function: Function) -> Ball {
        use Function::*;
        let (x, e) = (self.value, self.error);
        if !e.is_finite() {
            return Ball::UNKNOWN;
        }
        match function {
            Exp => Ball::new(x.exp(), x.exp() * e.exp_m1(), LIBRARY),
            Log if self.is_positive() => self.moved(x.ln(), 2.0 / x),
            // Near their zeros the error is that of the argument's last place.
            Sin => Ball::new(x.sin(), e + LIBRARY, LIBRARY),
            Cos => Ball::new(x.cos(), e + LIBRARY, LIBRARY),
            Tan => self.of(Sin).divided_by(self.of(Cos)),
            Atan => self.moved(x.atan(), 1.0),
            Asinh => self.moved(x.asinh(), 1.0),
            Tanh => self.moved(x.tanh(), 1.0),
            Sinh => self.moved(x.sinh(), (x.abs() + e).cosh()),
            Cosh => self.moved(x.cosh(), (x.abs() + e).cosh()),
            Abs => Ball {
                value: x.abs(),
                error: e,
            },
            Sign if self.is_away_from_zero() => Ball::exact(x.signum()),
            _ => Ball::UNKNOWN,
        }
    }

    /// The smaller or the larger of two.
    pub(super) fn chosen(self, function: Function, other: Ball) -> Ball {
        let value = match function {
            Function::Min => self.value.min(other.value),
            Function::Max => self.value.max(other.value),
            _ => return Ball::UNKNOWN,
        };
        Ball::new(value, self.error.max(other.error), 0.0)
    }
}
