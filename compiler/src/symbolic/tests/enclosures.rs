//! Where values lie: ends that are exact multiples of pi, the branches of circular functions, and
//! brackets of constants.

use super::parse;
use crate::symbolic::big::{self, PRECISION};
use crate::symbolic::enclosure::{Enclosure, End};
use crate::symbolic::{Bound, Expr, Interval, Pool, Rational, Sign, Symbol, SymbolKind};

/// Twelfths of pi and the sine there (Abramowitz and Stegun 1964, table 4.3.46).
const SINES: [(i64, &str); 9] = [
    (-6, "-1"),
    (-4, "-sqrt(3/4)"),
    (-3, "-sqrt(1/2)"),
    (-2, "-1/2"),
    (0, "0"),
    (2, "1/2"),
    (3, "sqrt(1/2)"),
    (4, "sqrt(3/4)"),
    (6, "1"),
];

/// Twelfths of pi and the tangent there (the same table).
const TANGENTS: [(i64, &str); 7] = [
    (-4, "-sqrt(3)"),
    (-3, "-1"),
    (-2, "-sqrt(1/3)"),
    (0, "0"),
    (2, "sqrt(1/3)"),
    (3, "1"),
    (4, "sqrt(3)"),
];

fn end(number: Rational, turns: Rational, open: bool) -> End {
    End {
        number,
        turns,
        open,
    }
}

fn ratio(numerator: i64, denominator: u64) -> Rational {
    Rational::from_parts(numerator.into(), denominator.into())
}

fn pool_with_x() -> (Pool, Symbol) {
    let pool = Pool::new();
    let x = pool.symbol("x", SymbolKind::State);
    (pool, x)
}

/// A pool in which x lies between two formulas.
fn between(lower: &str, upper: &str, open: bool) -> (Pool, Symbol) {
    let (pool, x) = pool_with_x();
    let bound = |text: &str| {
        let e = parse(&pool, text);
        if open {
            Bound::Open(e)
        } else {
            Bound::Closed(e)
        }
    };
    let (lower, upper) = (bound(lower), bound(upper));
    pool.set_range(x, Interval { lower, upper });
    (pool, x)
}

fn enclosed(pool: &Pool, e: Expr) -> Enclosure {
    pool.enclosure(e, 4)
}

#[test]
fn inverse_functions_lie_between_the_multiples_their_argument_tells() {
    for (function, table) in [("asin", &SINES[..]), ("acos", &SINES), ("atan", &TANGENTS)] {
        for (i, &(first, lower)) in table.iter().enumerate() {
            for &(last, upper) in &table[i + 1..] {
                for open in [false, true] {
                    let (pool, _) = between(lower, upper, open);
                    let found = enclosed(&pool, parse(&pool, &format!("{function}(x)")));
                    let at = |twelfths: i64| end(Rational::ZERO, ratio(twelfths, 12), open);
                    let expected = match function {
                        // acos(x) = pi/2 - asin(x)
                        "acos" => Enclosure::between(at(6 - last), at(6 - first)),
                        _ => Enclosure::between(at(first), at(last)),
                    };
                    assert_eq!(found, expected, "{function}(x), x from {lower} to {upper}");
                }
            }
        }
    }
}

#[test]
fn functions_of_anything_lie_within_their_values() {
    let (pool, _) = pool_with_x();
    let found = |text: &str| enclosed(&pool, parse(&pool, text));
    for text in ["tanh(x)", "erf(x)"] {
        assert_eq!(found(text), Enclosure::open(-1, 1), "{text}");
    }
    assert_eq!(found("normal_cdf(x)"), Enclosure::open(0, 1));
    assert_eq!(found("asin(x)"), Enclosure::within_turns(1, 2, false));
    assert_eq!(found("atan(x)"), Enclosure::within_turns(1, 2, true));
    assert_eq!(found("acos(x)"), Enclosure::half_turn());
    assert_eq!(found("x"), Enclosure::UNKNOWN);
    assert_eq!(found("exp(x)"), Enclosure::of_sign(Sign::Positive));
    assert_eq!(found("x^2"), Enclosure::of_sign(Sign::NonNegative));
}

#[test]
fn sums_and_multiples_move_the_ends() {
    let (pool, x) = pool_with_x();
    let lower = Bound::Closed(parse(&pool, "1/2 - pi"));
    let upper = Bound::Open(parse(&pool, "3 + 2*pi"));
    pool.set_range(x, Interval { lower, upper });
    for (text, lower, upper) in [
        ("x", (ratio(1, 2), ratio(-1, 1)), (ratio(3, 1), ratio(2, 1))),
        (
            "x + 5",
            (ratio(11, 2), ratio(-1, 1)),
            (ratio(8, 1), ratio(2, 1)),
        ),
        (
            "x + pi/3",
            (ratio(1, 2), ratio(-2, 3)),
            (ratio(3, 1), ratio(7, 3)),
        ),
        (
            "2*x/3",
            (ratio(1, 3), ratio(-2, 3)),
            (ratio(2, 1), ratio(4, 3)),
        ),
    ] {
        let expected =
            Enclosure::between(end(lower.0, lower.1, false), end(upper.0, upper.1, true));
        assert_eq!(enclosed(&pool, parse(&pool, text)), expected, "{text}");
    }
    let turned = Enclosure::between(
        end(ratio(-6, 1), ratio(-4, 1), true),
        end(ratio(-1, 1), ratio(2, 1), false),
    );
    assert_eq!(enclosed(&pool, parse(&pool, "-2*x")), turned);
    let point = end(ratio(3, 7), Rational::ZERO, false);
    let number = enclosed(&pool, parse(&pool, "3/7"));
    assert_eq!(number, Enclosure::between(point.clone(), point));
    let point = end(Rational::ZERO, ratio(2, 5), false);
    let turns = enclosed(&pool, parse(&pool, "2*pi/5"));
    assert_eq!(turns, Enclosure::between(point.clone(), point));
}

#[test]
fn constants_are_bracketed_closely() {
    let (pool, _) = pool_with_x();
    for text in [
        "sqrt(2)",
        "-sqrt(5)",
        "exp(10)",
        "exp(-30)",
        "log(3)",
        "sin(1)",
        "2^(1/3)*pi^2",
    ] {
        let e = parse(&pool, text);
        let value = pool.eval_big(e, &Default::default()).expect("a value");
        let found = enclosed(&pool, e);
        let (lower, upper) = (found.lower.expect("an end"), found.upper.expect("an end"));
        assert!(lower.turns.is_zero() && upper.turns.is_zero(), "{text}");
        let big = |end: &End| big::from_rational(&end.number, PRECISION);
        assert!(big(&lower) < value && value < big(&upper), "{text}");
        let width = big::to_f64(&(big(&upper) - big(&lower)));
        assert!(
            width <= 1e-11 * big::to_f64(&value).abs().max(1.0),
            "{text}: {width}"
        );
    }
    // Fifty digits are not taken for the number itself.
    let root = "1.41421356237309504880168872420969807856967187537694";
    let below = pool.sub(parse(&pool, "sqrt(2)"), parse(&pool, root));
    assert_eq!(pool.sign(below), Sign::Positive);
    let above = pool.sub(parse(&pool, "sqrt(2)"), parse(&pool, &format!("{root}9")));
    assert_eq!(pool.sign(above), Sign::Negative);
}

#[test]
fn circular_functions_have_a_sign_on_their_quadrants() {
    use Sign::{Negative, NonNegative, NonPositive, Positive, Unknown};
    for (function, lower, upper, open, sign) in [
        ("sin", "0", "pi", true, Positive),
        ("sin", "0", "pi", false, NonNegative),
        ("sin", "pi", "2*pi", true, Negative),
        ("sin", "-pi", "0", true, Negative),
        ("sin", "-1", "1", true, Unknown),
        ("cos", "-pi/2", "pi/2", true, Positive),
        ("cos", "-pi/2", "pi/2", false, NonNegative),
        ("cos", "pi/2", "3*pi/2", false, NonPositive),
        ("cos", "0", "2", true, Unknown),
        ("tan", "0", "pi/2", true, Positive),
        ("tan", "pi/2", "pi", true, Negative),
        ("tan", "-pi/2", "0", true, Negative),
        ("tan", "pi", "3*pi/2", true, Positive),
        ("tan", "-1", "1", true, Unknown),
    ] {
        let (pool, _) = between(lower, upper, open);
        let e = parse(&pool, &format!("{function}(x)"));
        assert_eq!(pool.sign(e), sign, "{function} from {lower} to {upper}");
    }
}
