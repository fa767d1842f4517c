//! Rules of signs, each against all values of those signs; and monotone formulas on ranges.

use super::parse;
use crate::symbolic::{Bound, Function, Interval, Pool, Rational, Sign, SymbolKind};

const ALL: [Sign; 6] = [
    Sign::Positive,
    Sign::NonNegative,
    Sign::Zero,
    Sign::NonPositive,
    Sign::Negative,
    Sign::Unknown,
];

/// Numbers of a sign: whatever two of them add up or multiply to, another pair gives the opposite of it
/// where the signs allow that.
fn samples(sign: Sign) -> Vec<i64> {
    let all = -3..=3i64;
    let keep = |n: &i64| match sign {
        Sign::Positive => *n > 0,
        Sign::NonNegative => *n >= 0,
        Sign::Zero => *n == 0,
        Sign::NonPositive => *n <= 0,
        Sign::Negative => *n < 0,
        Sign::Unknown => true,
    };
    all.filter(keep).collect()
}

/// The most that can be said of some numbers.
fn strongest(values: &[i64]) -> Sign {
    let (some_above, some_below) = (values.iter().any(|v| *v > 0), values.iter().any(|v| *v < 0));
    let some_zero = values.contains(&0);
    match (some_above, some_zero, some_below) {
        (true, false, false) => Sign::Positive,
        (true, true, false) => Sign::NonNegative,
        (false, true, false) => Sign::Zero,
        (false, true, true) => Sign::NonPositive,
        (false, false, true) => Sign::Negative,
        _ => Sign::Unknown,
    }
}

fn of_pairs(a: Sign, b: Sign, f: impl Fn(i64, i64) -> i64) -> Sign {
    let (left, right) = (samples(a), samples(b));
    let values: Vec<i64> = left
        .iter()
        .flat_map(|&x| right.iter().map(move |&y| (x, y)))
        .map(|(x, y)| f(x, y))
        .collect();
    strongest(&values)
}

#[test]
fn signs_of_sums_products_and_negatives() {
    for a in ALL {
        assert_eq!(strongest(&samples(a)), a);
        let negatives: Vec<i64> = samples(a).iter().map(|n| -n).collect();
        assert_eq!(a.negate(), strongest(&negatives), "{a:?}");
        let all = |holds: fn(i64) -> bool| samples(a).into_iter().all(holds);
        assert_eq!(a.is_positive(), all(|n| n > 0), "{a:?}");
        assert_eq!(a.is_non_negative(), all(|n| n >= 0), "{a:?}");
        assert_eq!(a.is_non_positive(), all(|n| n <= 0), "{a:?}");
        assert_eq!(a.is_non_zero(), all(|n| n != 0), "{a:?}");
        for b in ALL {
            assert_eq!(a.plus(b), of_pairs(a, b, |x, y| x + y), "{a:?} + {b:?}");
            assert_eq!(a.times(b), of_pairs(a, b, |x, y| x * y), "{a:?} * {b:?}");
        }
    }
    for n in -2..=2i64 {
        assert_eq!(Sign::of(&Rational::from(n)), strongest(&[n]));
    }
}

/// A pool with a symbol of each sign that a range can state, named `a...` and `b...`.
fn signed_pool() -> (Pool, Vec<Sign>) {
    let pool = Pool::new();
    let zero = pool.zero();
    let stated = vec![
        Sign::Positive,
        Sign::NonNegative,
        Sign::NonPositive,
        Sign::Negative,
        Sign::Unknown,
    ];
    for (i, sign) in stated.iter().enumerate() {
        let (lower, upper) = match sign {
            Sign::Positive => (Bound::Open(zero), Bound::Infinite),
            Sign::NonNegative => (Bound::Closed(zero), Bound::Infinite),
            Sign::NonPositive => (Bound::Infinite, Bound::Closed(zero)),
            Sign::Negative => (Bound::Infinite, Bound::Open(zero)),
            _ => (Bound::Infinite, Bound::Infinite),
        };
        for letter in ["a", "b"] {
            let symbol = pool.symbol(&format!("{letter}{i}"), SymbolKind::Parameter);
            pool.set_range(symbol, Interval { lower, upper });
        }
    }
    (pool, stated)
}

#[test]
fn signs_of_choices_and_odd_functions() {
    let (pool, stated) = signed_pool();
    let symbol = |name: String| pool.var(pool.find_symbol(&name).expect("a symbol"));
    for (i, &a) in stated.iter().enumerate() {
        let left = symbol(format!("a{i}"));
        assert_eq!(pool.sign(left), a);
        for (j, &b) in stated.iter().enumerate() {
            let right = symbol(format!("b{j}"));
            let larger = pool.sign(pool.call(Function::Max, &[left, right]));
            assert_eq!(larger, of_pairs(a, b, i64::max), "max of {a:?} and {b:?}");
            let smaller = pool.sign(pool.call(Function::Min, &[left, right]));
            assert_eq!(smaller, of_pairs(a, b, i64::min), "min of {a:?} and {b:?}");
        }
        use Function::{
            Abs, Acos, Acosh, Asin, Asinh, Atan, Atanh, Cbrt, Cosh, Erf, Exp, Expm1Ratio,
            NormalCdf, NormalPdf, NormalQuantile, Sinh, Tanh,
        };
        for odd in [
            Asin,
            Atan,
            Sinh,
            Tanh,
            Asinh,
            Atanh,
            Cbrt,
            Erf,
            Function::Sign,
        ] {
            assert_eq!(
                pool.sign(pool.call(odd, &[left])),
                a,
                "{} of {a:?}",
                odd.name()
            );
        }
        let sizes: Vec<i64> = samples(a).iter().map(|n| n.abs()).collect();
        assert_eq!(
            pool.sign(pool.call(Abs, &[left])),
            strongest(&sizes),
            "abs of {a:?}"
        );
        for positive in [Exp, Cosh, NormalCdf, NormalPdf, Expm1Ratio] {
            assert!(pool.sign(pool.call(positive, &[left])).is_positive());
        }
        for weak in [Acos, Acosh] {
            assert_eq!(pool.sign(pool.call(weak, &[left])), Sign::NonNegative);
        }
        assert_eq!(pool.sign(pool.call(NormalQuantile, &[left])), Sign::Unknown);
    }
}

/// Powers have the sign of the powers of all numbers of that sign which have one.
#[test]
fn signs_of_powers() {
    let (pool, stated) = signed_pool();
    for (i, &a) in stated.iter().enumerate() {
        let exponents = "2 3 4 -1 -2 -3 1/2 3/2 -1/2 1/3";
        for exponent in exponents.split(' ') {
            let broken = exponent.contains('/');
            let inverse = exponent.starts_with('-');
            let odd = ["3", "-1", "-3"].contains(&exponent);
            let defined = samples(a)
                .into_iter()
                .filter(|n| !(inverse && *n == 0 || broken && *n < 0));
            let values: Vec<i64> = defined
                .map(|n| if odd { n.signum() } else { n.signum().abs() })
                .collect();
            let e = parse(&pool, &format!("a{i}^({exponent})"));
            let found = pool.sign(e);
            if values.is_empty() || a == Sign::NonPositive && broken {
                // A power with hardly a value anywhere: nothing false can be said of it.
                continue;
            }
            assert_eq!(found, strongest(&values), "{a:?}^({exponent})");
        }
        let found = pool.sign(parse(&pool, &format!("a{i}^b4")));
        let expected = match a {
            Sign::Positive => Sign::Positive,
            Sign::NonNegative => Sign::NonNegative,
            _ => Sign::Unknown,
        };
        assert_eq!(found, expected, "{a:?} to a symbol");
    }
}

/// Formulas in x on a range, which are monotone there: their sign follows from one end.
#[test]
fn monotone_formulas_have_the_sign_of_their_least_or_largest_value() {
    use Sign::{Negative, NonNegative, NonPositive, Positive, Unknown};
    for (text, lower, upper, open, sign) in [
        ("x^2 + x - 2", "1", "3", true, Positive),
        ("x^2 + x - 2", "1", "3", false, NonNegative),
        ("x^2 + x - 1", "1", "3", false, Positive),
        ("x^2 + x - 3", "1", "3", true, Unknown),
        ("x - 3", "1", "3", true, Negative),
        ("x - 3", "1", "3", false, NonPositive),
        ("x - 4", "1", "3", false, Negative),
        ("1 - x", "1", "3", true, Negative),
        ("1 - x", "1", "3", false, NonPositive),
        ("3 - x", "1", "3", true, Positive),
        ("3 - x", "1", "3", false, NonNegative),
        ("2 - x", "1", "3", false, Unknown),
        ("1/x - 1", "1", "3", true, Negative),
        ("exp(-x) - exp(-3)", "1", "3", true, Positive),
        ("exp(x) - exp(3)", "1", "3", false, NonPositive),
        ("log(x)", "1", "3", true, Positive),
        ("log(x)", "1", "3", false, NonNegative),
        ("log(x/3)", "1", "3", true, Negative),
        ("log(x) - 2", "1", "3", true, Negative),
        ("log(x - 2)", "1", "3", true, Negative),
        ("x + 2", "-1", "1", false, Positive),
        ("x - 2", "-1", "1", false, Negative),
        ("x", "1", "3", false, Positive),
        ("x", "-3", "-1", false, Negative),
        ("x", "-1", "1", false, Unknown),
        ("x", "0", "1", false, NonNegative),
        ("x", "-1", "0", false, NonPositive),
        ("x", "-1", "0", true, Negative),
    ] {
        let pool = Pool::new();
        let x = pool.symbol("x", SymbolKind::State);
        let bound = |text: &str| {
            let e = parse(&pool, text);
            if open {
                Bound::Open(e)
            } else {
                Bound::Closed(e)
            }
        };
        let (lower_end, upper_end) = (bound(lower), bound(upper));
        pool.set_range(
            x,
            Interval {
                lower: lower_end,
                upper: upper_end,
            },
        );
        assert_eq!(
            pool.sign(parse(&pool, text)),
            sign,
            "{text} from {lower} to {upper}, open: {open}"
        );
    }
}
