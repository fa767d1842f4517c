//! Factors over the rational numbers, of polynomials for which they are known.

use super::{poly, proportional};
use crate::symbolic::Rational;
use crate::symbolic::normal::poly::Poly;
use crate::symbolic::normal::powers::prime_powers;
use crate::symbolic::tests::pool;

/// Polynomials, and the factors that quadratic formulas and rational roots find: all there are.
const FACTORS: &[(&str, &[&str])] = &[
    ("1 - x^2", &["x - 1", "x + 1"]),
    ("x^2 - y^2", &["x - y", "x + y"]),
    ("4*x^2 - 9*y^2", &["2*x - 3*y", "2*x + 3*y"]),
    ("x^2 - 4*y^2*z^2", &["x - 2*y*z", "x + 2*y*z"]),
    ("x^4 - 1", &["x - 1", "x + 1", "x^2 + 1"]),
    ("x^4 - 5*x^2 + 6", &["x^2 - 2", "x^2 - 3"]),
    ("x^2 + 3*x*y + 2*y^2", &["x + y", "x + 2*y"]),
    ("6*x^2 - x - 2", &["2*x + 1", "3*x - 2"]),
    ("(x + y + z)*(x + y - z)", &["x + y + z", "x + y - z"]),
    (
        "(x + y^2 - 3)*(x - 2*y + z)",
        &["x + y^2 - 3", "x - 2*y + z"],
    ),
    ("(x^2 + y)*(x^2 - z)", &["x^2 + y", "x^2 - z"]),
    ("(x^3 + y)*(x^3 - y - 1)", &["x^3 + y", "x^3 - y - 1"]),
    (
        "(2*x - 3)*(x + 5)*(3*x + 1)",
        &["2*x - 3", "x + 5", "3*x + 1"],
    ),
    ("6*x^3 + 11*x^2 - 3*x - 2", &["x + 2", "2*x - 1", "3*x + 1"]),
    ("-x^3 - x^2 + 2", &["x - 1", "x^2 + 2*x + 2"]),
    ("x^3 - 1", &["x - 1", "x^2 + x + 1"]),
    ("8*x^3 + 27", &["2*x + 3", "4*x^2 - 6*x + 9"]),
    ("p - q", &["p - q"]),
    ("x^2 + 1", &["x^2 + 1"]),
    ("x^2 - 2", &["x^2 - 2"]),
    ("x^2 - 8", &["x^2 - 8"]),
    ("x^2 + y^2", &["x^2 + y^2"]),
    ("x^2 - 2*y^2", &["x^2 - 2*y^2"]),
    ("x^2 - y", &["x^2 - y"]),
    ("x^2 - y^3", &["x^2 - y^3"]),
    ("x^2 + x*y + y^2", &["x^2 + x*y + y^2"]),
    ("x^2 - y^2 - 2*y - 2", &["x^2 - y^2 - 2*y - 2"]),
    ("x^2 - y^2 - y*z - z^2", &["x^2 - y^2 - y*z - z^2"]),
    ("x^3 - 2", &["x^3 - 2"]),
    ("x^3 + x + 1", &["x^3 + x + 1"]),
    ("x^3 - y^3 + 1", &["x^3 - y^3 + 1"]),
    ("x^5 - x - 1", &["x^5 - x - 1"]),
];

#[test]
fn known_factors_are_found_and_no_others() {
    let pool = pool();
    for (text, expected) in FACTORS {
        let whole = poly(&pool, text);
        let (turned, found) = whole.rational_factors(&pool);
        assert_eq!(found.len(), expected.len(), "{text}: {found:?}");
        for factor in *expected {
            let factor = poly(&pool, factor);
            assert!(
                found.iter().any(|f| proportional(&pool, f, &factor)),
                "{text}: {factor:?}"
            );
        }
        let mut back = Poly::constant((if turned { -1 } else { 1 }).into());
        for factor in &found {
            back = back.raw_product(factor, &pool).expect("a small product");
        }
        let content = |p: &Poly| p.positive_content(&pool).expect("a number");
        let scale = content(&whole) / content(&back);
        assert_eq!(back.scaled(&scale), whole, "{text}");
    }
}

/// A number is the product of its prime powers, and the bases are primes.
#[test]
fn numbers_come_apart_into_primes() {
    for (top, bottom) in [
        (1, 1),
        (2, 1),
        (360, 1),
        (1, 360),
        (343, 1024),
        (9_699_690, 121),
        (39_601, 19_997),
        (1_000_003, 20_011),
    ] {
        let number = Rational::from_parts(i64::into(top), u64::into(bottom));
        let powers = prime_powers(&number);
        let mut back = Rational::ONE;
        for (prime, count) in &powers {
            let prime: u64 = prime.try_into().expect("a small prime");
            assert!(prime > 1, "{number}");
            assert!(
                (2..prime)
                    .take_while(|d| d * d <= prime)
                    .all(|d| !prime.is_multiple_of(d)),
                "{prime}"
            );
            back *= Rational::from(prime).pow(*count as isize);
        }
        assert_eq!(back, number);
        let mut bases: Vec<_> = powers.iter().map(|(prime, _)| prime).collect();
        bases.dedup();
        assert_eq!(bases.len(), powers.len(), "{number}");
    }
}
