//! Formulas told apart in double precision: at points inside the ranges, and only where they differ.

use std::collections::BTreeSet;

use super::parse;
use crate::symbolic::sample::Sampler;
use crate::symbolic::zero::is_settled;
use crate::symbolic::{Big, Bound, Interval, Pool, SymbolKind};

/// A pool in which x and y have the given ends; `K` is positive.
fn pool_with(ends: [(&str, &str); 2]) -> Pool {
    let pool = Pool::new();
    let large = pool.symbol("K", SymbolKind::Parameter);
    let names = ["x", "y"].map(|name| pool.symbol(name, SymbolKind::State));
    let lower = Bound::Open(pool.zero());
    pool.set_range(
        large,
        Interval {
            lower,
            upper: Bound::Infinite,
        },
    );
    for (symbol, (lower, upper)) in names.into_iter().zip(ends) {
        let end = |text: &str| match text {
            "" => Bound::Infinite,
            text => Bound::Open(parse(&pool, text)),
        };
        let (lower, upper) = (end(lower), end(upper));
        pool.set_range(symbol, Interval { lower, upper });
    }
    pool
}

#[test]
fn points_lie_inside_the_ranges() {
    for ends in [
        [("", ""), ("0", "1")],
        [("5", ""), ("", "-7")],
        [("0", "1/1000"), ("-1000", "-999")],
        [("K", ""), ("", "-K")],
        [("K", "2*K"), ("-K", "K")],
        [("y", ""), ("1", "2")],
        [("-2", "-1"), ("x", "0")],
        [("1000000", "1000001"), ("", "")],
    ] {
        let pool = pool_with(ends);
        let (a, b) = (
            parse(&pool, "x + 2*y + 3*K"),
            parse(&pool, "x + 2*y + 3*K + 1/8"),
        );
        let witness = pool.apart(a, b).expect("they differ everywhere");
        assert_eq!(witness.point.len(), 3);
        let values = witness.point.iter().copied().collect();
        for &(symbol, value) in &witness.point {
            let Interval { lower, upper } = pool.range(symbol);
            let end = |bound: Bound| bound.value().and_then(|e| pool.eval_f64(e, &values));
            let inside =
                end(lower).is_none_or(|l| l < value) && end(upper).is_none_or(|u| value < u);
            assert!(
                inside,
                "{} = {value} for {ends:?}",
                pool.symbol_name(symbol)
            );
        }
        let found = (pool.eval_f64(a, &values), pool.eval_f64(b, &values));
        let (left, right) = (found.0.expect("a value"), found.1.expect("a value"));
        assert!((witness.left - left).abs() <= 1e-9 * left.abs().max(1.0));
        assert!((witness.right - right).abs() <= 1e-9 * right.abs().max(1.0));
        assert!((right - left - 0.125).abs() < 1e-6);
    }
}

#[test]
fn what_is_equal_or_has_no_value_is_not_told_apart() {
    let pool = pool_with([("", ""), ("0", "1")]);
    for (left, right) in [
        ("(x + y)^2", "x^2 + 2*x*y + y^2"),
        ("sin(x)^2", "1 - cos(x)^2"),
        ("exp(x)*exp(y)", "exp(x + y)"),
        ("log(-y)", "y"),
        ("min(x, y)", "x + y - max(x, y)"),
    ] {
        let (a, b) = (parse(&pool, left), parse(&pool, right));
        assert_eq!(pool.apart(a, b), None, "{left} and {right}");
    }
    let difference = |text: &str| pool.is_plainly_not_zero(parse(&pool, text));
    assert!(difference("x^2 + 1"));
    assert!(difference("sin(x) - x"));
    assert!(difference("2^y - 1"));
    assert!(!difference("x - 1 - (x - 1)"));
    assert!(!difference("(x + 1)^2 - x^2 - 2*x - 1"));
    assert!(pool.varies(parse(&pool, "x + y")) && pool.varies(parse(&pool, "exp(y)")));
    assert!(!pool.varies(parse(&pool, "cosh(x)^2 - sinh(x)^2")));
    assert!(!pool.varies(parse(&pool, "sqrt(2) + pi")));
}

/// A range without any point, one of which no double lies inside, and one whose end is not known well
/// enough to tell.
#[test]
fn empty_ranges_have_no_point() {
    for ends in [
        ("2", "1"),
        ("1", "1"),
        ("10^300*10^8", ""),
        ("", "-10^300*10^8"),
        ("exp(35)", ""),
        ("", "-exp(35)"),
    ] {
        let pool = pool_with([ends, ("0", "1")]);
        let (a, b) = (parse(&pool, "x*K"), parse(&pool, "x*K + 1"));
        assert_eq!(pool.apart(a, b), None, "{ends:?}");
    }
}

/// The points at which high precision looks for a difference: inside the ranges, each another one.
#[test]
fn drawn_points_lie_inside_the_ranges() {
    for ends in [
        [("", ""), ("0", "1")],
        [("5", ""), ("", "-7")],
        [("K", "2*K"), ("-K", "K")],
        [("y", ""), ("1", "2")],
        [("y", ""), ("", "x")],
    ] {
        let pool = pool_with(ends);
        let symbols = ["x", "y"].map(|name| pool.find_symbol(name).expect("a symbol"));
        let mut sampler = Sampler::new(&pool);
        let mut seen = BTreeSet::new();
        for _ in 0..40 {
            let point = sampler.point(&symbols).expect("a point");
            for (&symbol, value) in &point {
                let Interval { lower, upper } = pool.range(symbol);
                let end = |bound: Bound| bound.value().and_then(|e| pool.eval_big(e, &point));
                let inside =
                    end(lower).is_none_or(|l| l < *value) && end(upper).is_none_or(|u| *value < u);
                assert!(
                    inside,
                    "{} = {value} for {ends:?}",
                    pool.symbol_name(symbol)
                );
            }
            seen.insert(point[&symbols[0]].to_f64().value().to_bits());
        }
        assert!(seen.len() > 20, "{ends:?}");
    }
    let pool = pool_with([("", ""), ("0", "1")]);
    let x = pool.find_symbol("x").expect("x");
    let mut sampler = Sampler::new(&pool);
    let drawn: Vec<f64> = (0..40)
        .map(|_| sampler.point(&[x]).expect("a point")[&x].to_f64().value())
        .collect();
    assert!(drawn.iter().any(|v| *v < -1.0) && drawn.iter().any(|v| *v > 1.0));
    assert!(drawn.iter().any(|v| v.abs() < 1.0) && drawn.iter().all(|v| v.abs() < 12.0));
    for ends in [
        ("2", "1"),
        ("1", "1"),
        ("10^300*10^8", ""),
        ("", "-10^300*10^8"),
    ] {
        let pool = pool_with([ends, ("0", "1")]);
        let x = pool.find_symbol("x").expect("x");
        assert_eq!(Sampler::new(&pool).point(&[x]), None, "{ends:?}");
    }
}

/// A difference counts when more bits leave ten of its digits as they are.
#[test]
fn rounding_is_no_difference() {
    let number = |value: f64| {
        Big::try_from(value)
            .expect("a number")
            .with_precision(256)
            .value()
    };
    for (rough, fine, settled) in [
        (1.0, 1.0, true),
        (-2.5, -2.5, true),
        (1.0, 1.0 + 1e-13, true),
        (-1e-60, -1.000_000_000_000_1e-60, true),
        (1.0, 1.0 + 1e-7, false),
        (1.0, -1.0, false),
        (1e-77, 3e-90, false),
        (0.0, 1e-90, false),
        (1e-77, 0.0, false),
        (0.0, 0.0, false),
    ] {
        assert_eq!(
            is_settled(&number(rough), &number(fine)),
            settled,
            "{rough} and {fine}"
        );
    }
}
