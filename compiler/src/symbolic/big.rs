//! Functions at high precision, total: outside its domain a function has no value.

use dashu_base::{Abs, Sign, UnsignedAbs};
use dashu_float::FBig;
use dashu_float::round::mode::HalfEven;
use dashu_int::IBig;

use super::function::Function;
use super::node::Rational;

/// A binary floating-point number of fixed precision.
pub type Big = FBig<HalfEven, 2>;

/// Bits of every evaluation. The decisions need 100; the rest is margin for cancellation.
pub(super) const PRECISION: usize = 256;

/// Arguments of exponentials are kept below this, so that no result takes long.
const MAX_EXPONENT: f64 = 1e6;

/// A whole number at the given precision.
pub(super) fn whole(value: i64, precision: usize) -> Big {
    Big::from(IBig::from(value))
        .with_precision(precision)
        .value()
}

/// A rational number, rounded once.
pub(super) fn from_rational(value: &Rational, precision: usize) -> Big {
    let top = Big::from(value.numerator().clone())
        .with_precision(precision)
        .value();
    let bottom = Big::from(IBig::from(value.denominator().clone()))
        .with_precision(precision)
        .value();
    top / bottom
}

/// The nearest double.
pub(super) fn to_f64(value: &Big) -> f64 {
    value.to_f64().value()
}

pub(super) fn is_negative(value: &Big) -> bool {
    value.repr().sign() == Sign::Negative && !is_zero(value)
}

pub(super) fn is_zero(value: &Big) -> bool {
    value.repr().significand().is_zero()
}

fn is_positive(value: &Big) -> bool {
    !is_zero(value) && !is_negative(value)
}

/// `exp(x)`, unless the result is out of all proportion.
pub(super) fn exp(x: &Big) -> Option<Big> {
    (to_f64(x).abs() < MAX_EXPONENT).then(|| x.exp())
}

/// `base^exponent`: a negative base takes whole exponents only.
pub(super) fn pow(base: &Big, exponent: &Big, exact: Option<&Rational>) -> Option<Big> {
    if let Some(n) = exact.filter(|n| n.is_int()) {
        return whole_power(base, n.numerator());
    }
    if is_zero(base) {
        return is_positive(exponent).then(|| base.clone());
    }
    if is_negative(base) {
        return None;
    }
    if exact.is_some_and(|n| *n == Rational::from_parts(1.into(), 2u8.into())) {
        return Some(base.sqrt());
    }
    exp(&(exponent * base.ln()))
}

fn whole_power(base: &Big, n: &IBig) -> Option<Big> {
    if is_zero(base) {
        return (*n > IBig::ZERO).then(|| base.clone());
    }
    let size: u64 = n.unsigned_abs().try_into().ok()?;
    let log = base
        .repr()
        .significand()
        .unsigned_abs()
        .to_f64()
        .value()
        .log2()
        + base.repr().exponent() as f64;
    (size as f64 * log.abs().max(1.0) < 2.0 * MAX_EXPONENT).then(|| base.powi(n.clone()))
}

/// A function of one argument.
pub(super) fn unary(function: Function, x: &Big) -> Option<Big> {
    use Function::*;
    let precision = x.precision();
    let one = whole(1, precision);
    let within = |closed: bool| {
        let size = x.clone().abs();
        size < one || (closed && size == one)
    };
    let small = to_f64(x).abs() < MAX_EXPONENT;
    match function {
        Exp => exp(x),
        Log => is_positive(x).then(|| x.ln()),
        Sqrt => (!is_negative(x)).then(|| x.sqrt()),
        Abs => Some(x.clone().abs()),
        Sign => Some(sign(x)),
        Cbrt if is_zero(x) => Some(x.clone()),
        Cbrt => {
            let root = (x.clone().abs().ln() / whole(3, precision)).exp();
            Some(if is_negative(x) { -root } else { root })
        }
        Sin => small.then(|| x.sin()),
        Cos => small.then(|| x.cos()),
        Tan => {
            let (sin, cos) = if small { x.sin_cos() } else { return None };
            (!is_zero(&cos)).then(|| sin / cos)
        }
        Asin => within(true).then(|| x.asin()),
        Acos => within(true).then(|| x.acos()),
        Atan => Some(x.atan()),
        Sinh => small.then(|| x.sinh()),
        Cosh => small.then(|| x.cosh()),
        Tanh => small.then(|| x.tanh()),
        Asinh => Some(x.asinh()),
        Acosh => (*x >= one).then(|| x.acosh()),
        Atanh => within(false).then(|| x.atanh()),
        Erf => super::big_normal::erf(x),
        NormalCdf => super::big_normal::cdf(x),
        NormalPdf => super::big_normal::pdf(x),
        NormalQuantile => super::big_normal::quantile(x),
        Expm1Ratio if is_zero(x) => Some(one),
        Expm1Ratio => small.then(|| x.exp_m1() / x),
        Min | Max => None,
    }
}

/// A function of two arguments.
pub(super) fn binary(function: Function, x: &Big, y: &Big) -> Option<Big> {
    match function {
        Function::Min => Some(if x < y { x.clone() } else { y.clone() }),
        Function::Max => Some(if x > y { x.clone() } else { y.clone() }),
        _ => None,
    }
}

fn sign(x: &Big) -> Big {
    whole(
        i64::from(is_positive(x)) - i64::from(is_negative(x)),
        x.precision(),
    )
}
