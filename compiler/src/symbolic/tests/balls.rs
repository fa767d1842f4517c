//! The bounds of double precision: every value that numbers within them can give lies inside, and they
//! are not much wider than that. The values come from arithmetic at 256 bits.

use crate::symbolic::ball::Ball;
use crate::symbolic::big::{self, PRECISION};
use crate::symbolic::{Big, Function, Rational};

fn ball(value: f64, error: f64) -> Ball {
    Ball { value, error }
}

fn precise(value: f64) -> Big {
    let exact = Big::try_from(value).expect("a finite number");
    exact.with_precision(PRECISION).value()
}

fn ratio(numerator: i64, denominator: u64) -> Rational {
    Rational::from_parts(numerator.into(), denominator.into())
}

/// The ends of a ball and its middle.
fn spread(b: Ball) -> [Big; 3] {
    [-1.0, 0.0, 1.0].map(|side| precise(b.value) + precise(side * b.error))
}

/// The exact values lie in the ball, whose error is at most `widest`.
fn assert_holds(what: &str, found: Ball, exact: &[Big], widest: f64) {
    for value in exact {
        let gap = big::to_f64(&(value - precise(found.value))).abs();
        assert!(gap <= found.error, "{what}: {gap:e} in {found:?}");
    }
    assert!(found.error <= widest, "{what}: {found:?}");
}

fn says_nothing(found: Ball) -> bool {
    found.error.is_infinite()
}

#[test]
fn sums_and_products_hold_what_their_operands_give() {
    let (a, b) = (ball(2.0, 0.5), ball(-3.0, 0.25));
    let (left, right) = (spread(a), spread(b));
    let pairs = || left.iter().flat_map(|x| right.iter().map(move |y| (x, y)));
    let sums: Vec<Big> = pairs().map(|(x, y)| x + y).collect();
    let products: Vec<Big> = pairs().map(|(x, y)| x * y).collect();
    assert_holds("sum", a.plus(b), &sums, 0.7501);
    // |x| e + |y| d + d e
    assert_holds("product", a.times(b), &products, 2.1251);
}

#[test]
fn rounding_and_underflow_are_covered() {
    let third = Ball::number(&ratio(1, 3));
    let sum = third.plus(Ball::number(&ratio(1, 7)));
    let exact = |n, d| big::from_rational(&ratio(n, d), PRECISION);
    assert_holds("1/3", third, &[exact(1, 3)], 1e-15);
    assert_holds("1/3 + 1/7", sum, &[exact(10, 21)], 1e-15);
    assert_holds("pi", Ball::pi(), &[Big::pi(PRECISION)], 1e-15);
    let tiny = Ball::exact(1e-200);
    let square = precise(1e-200) * precise(1e-200);
    assert_holds("(1e-200)^2", tiny.times(tiny), &[square], 1e-280);
}

/// `(x + e)^n` for `|e|` up to the error, whole and broken, positive and negative n.
#[test]
fn powers_hold_what_their_base_gives() {
    for (base, n, widest) in [
        (ball(2.0, 0.1), ratio(5, 1), 21.0),
        (ball(-2.0, 0.1), ratio(3, 1), 4.0),
        (ball(-2.0, 0.1), ratio(-3, 1), 0.05),
        (ball(4.0, 0.5), ratio(1, 2), 0.3),
        (ball(4.0, 0.5), ratio(-3, 2), 0.1),
        // The exponent is no double, which counts for much here.
        (ball(1e300, 0.0), ratio(1, 3), 1e88),
    ] {
        let power = |x: &Big| {
            let exponent = big::from_rational(&n, PRECISION);
            big::pow(x, &exponent, Some(&n)).expect("a value")
        };
        let exact = spread(base).map(|x| power(&x));
        assert_holds(&format!("{base:?}^{n}"), base.to_number(&n), &exact, widest);
    }
    let (base, exponent) = (ball(2.0, 0.01), ball(1.5, 0.01));
    let mut exact = Vec::new();
    for x in spread(base) {
        exact.extend(spread(exponent).map(|p| (p * x.ln()).exp()));
    }
    assert_holds("2^1.5", base.to_power(exponent), &exact, 0.1);
}

#[test]
fn what_has_no_bound_has_no_value() {
    let around_zero = ball(0.1, 0.5);
    assert!(says_nothing(around_zero.to_number(&ratio(-1, 1))));
    assert!(says_nothing(around_zero.of(Function::Log)));
    assert!(says_nothing(around_zero.of(Function::Sign)));
    assert!(says_nothing(ball(-1.0, 0.0).of(Function::Log)));
    assert!(says_nothing(ball(-2.0, 0.0).to_number(&ratio(1, 2))));
    assert!(says_nothing(Ball::UNKNOWN.of(Function::Sin)));
    assert!(says_nothing(ball(1.0, 0.0).of(Function::NormalCdf)));
    // An odd exponent beyond what a double tells from an even one.
    let odd = ratio((1 << 60) + 1, 1);
    let power = ball(-1.0, 0.0).to_number(&odd);
    assert!((power.value + 1.0).abs() <= power.error, "{power:?}");
}

#[test]
fn functions_hold_what_their_argument_gives() {
    use Function::*;
    let (wide, narrow) = (ball(2.0, 0.25), ball(1.0, 0.01));
    for (function, argument, widest) in [
        (Exp, wide, 2.1),
        (Log, wide, 0.2501),
        (Sin, wide, 0.2501),
        (Cos, wide, 0.2501),
        (Tan, narrow, 0.08),
        (Atan, wide, 0.2501),
        (Asinh, wide, 0.2501),
        (Tanh, wide, 0.2501),
        (Sinh, wide, 1.2),
        (Cosh, wide, 1.2),
        (Abs, ball(-2.0, 0.25), 0.25),
        (Sign, ball(-2.0, 0.25), 0.0),
        (Log, ball(8.0, 1.0), 0.2501),
        (Sin, Ball::exact(std::f64::consts::PI), 1e-14),
        (Cos, Ball::exact(1.0), 1e-14),
        (Sin, Ball::exact(1.0), 1e-14),
    ] {
        let exact = spread(argument).map(|x| big::unary(function, &x).expect("a value"));
        let what = format!("{} of {argument:?}", function.name());
        assert_holds(&what, argument.of(function), &exact, widest);
    }
}

#[test]
fn the_smaller_and_the_larger_of_two() {
    let (a, b) = (ball(1.9, 0.5), ball(2.0, 0.1));
    for (function, larger) in [(Function::Max, true), (Function::Min, false)] {
        let chosen = |x: &Big, y: &Big| {
            if (x > y) == larger {
                x.clone()
            } else {
                y.clone()
            }
        };
        let mut exact = Vec::new();
        for x in spread(a) {
            exact.extend(spread(b).map(|y| chosen(&x, &y)));
        }
        assert_holds(function.name(), a.chosen(function, b), &exact, 0.5001);
        assert_holds(function.name(), b.chosen(function, a), &exact, 0.5001);
    }
}

#[test]
fn balls_that_touch_are_not_apart() {
    assert!(ball(1.0, 0.1).is_apart_from(ball(2.0, 0.1)));
    assert!(!ball(1.0, 0.1).is_apart_from(ball(1.0, 0.1)));
    assert!(!ball(1.0, 0.3).is_apart_from(ball(1.5, 0.3)));
    assert!(!ball(1.0, 0.0).is_apart_from(ball(1.5, 0.6)));
    assert!(!Ball::exact(1.0).is_apart_from(Ball::exact(1.0)));
    assert!(!Ball::UNKNOWN.is_apart_from(Ball::exact(1.0)));
    // Zero itself has no sign, and neither has what may be zero.
    assert!(says_nothing(Ball::exact(0.0).of(Function::Sign)));
    assert!(says_nothing(ball(1.0, 0.6).of(Function::Sign)));
}
