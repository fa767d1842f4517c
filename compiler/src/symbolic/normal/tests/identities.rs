//! Identities by the normal form alone, and equal fractions in one shape.

use super::normalizer;
use crate::symbolic::normal::{Fraction, Mode};
use crate::symbolic::tests::{parse, pool};

/// Identities that hold wherever both sides have a value, each with an expression of its own.
const IDENTITIES: &[(&str, &str)] = &[
    ("sqrt(x^2*p^2)", "p*sqrt(x^2)"),
    ("sqrt((x - 1)^4*p)", "(x - 1)^2*sqrt(p)"),
    ("(x^2)^(3/2)", "x^2*sqrt(x^2)"),
    ("(x^2*y^2)^(1/4)", "(x^2)^(1/4)*(y^2)^(1/4)"),
    ("sqrt(w^2)", "-w"),
    ("sqrt(-w^3)", "-w*sqrt(-w)"),
    ("sqrt(w^2*p^3)", "-w*p*sqrt(p)"),
    ("log(-w^3*p)", "3*log(-w) + log(p)"),
    ("log(w^2*p)", "2*log(-w) + log(p)"),
    ("sqrt((u - 1)^2*p)", "(1 - u)*sqrt(p)"),
    ("sqrt((1 - u)^3)", "(1 - u)*sqrt(1 - u)"),
    ("sqrt(12)", "2*sqrt(3)"),
    ("sqrt(2)*sqrt(3)", "sqrt(6)"),
    ("sqrt(3/5)", "sqrt(15)/5"),
    ("4^(1/3)", "2^(2/3)"),
    ("sqrt(p + q)*sqrt(p + q)", "p + q"),
    ("(p + q)^(3/2)", "(p + q)*sqrt(p + q)"),
    ("1/sqrt(p + q)", "sqrt(p + q)/(p + q)"),
    ("log(x^4)", "2*log(x^2)"),
    ("log(x^2*p)", "log(x^2) + log(p)"),
    ("log(6)", "log(2) + log(3)"),
    ("log(8/9)", "3*log(2) - 2*log(3)"),
    ("log((p + q)^3)", "3*log(p + q)"),
    ("log(exp(x)*p)", "x + log(p)"),
    ("abs(x)^2", "x^2"),
    ("abs(sin(x))^2", "sin(x)^2"),
    ("abs(sin(x))^3", "sin(x)^2*abs(sin(x))"),
    ("abs(-x)", "abs(x)"),
    ("abs(p*x)", "p*abs(x)"),
    ("abs(w)", "-w"),
    ("abs(x^3)", "x^2*abs(x)"),
    ("abs((x - y)^2)", "(x - y)^2"),
    ("abs(x - y)", "abs(y - x)"),
    ("cbrt(8*x)", "2*cbrt(x)"),
    ("cbrt(x)^3", "x"),
    ("cbrt(-x)", "-cbrt(x)"),
    ("cbrt(x^5)", "x*cbrt(x)^2"),
    ("cbrt(p)", "p^(1/3)"),
    ("exp(2*log(p))", "p^2"),
    ("exp(x + y)", "exp(x)*exp(y)"),
    ("exp(2*x)", "exp(x)^2"),
    ("exp(log(p)/2)", "sqrt(p)"),
    ("exp(x*log(p))", "p^x"),
    ("p^x*p^y", "p^(x + y)"),
    ("(p*q)^x", "p^x*q^x"),
    ("sin(-x)", "-sin(x)"),
    ("cos(y - x)", "cos(x - y)"),
    ("sin(x)^2 + cos(x)^2", "1"),
    ("sin(x)^3", "sin(x) - sin(x)*cos(x)^2"),
    ("cosh(x)^2 - sinh(x)^2", "1"),
    ("tanh(-x)", "-tanh(x)"),
    ("normal_cdf(-x)", "1 - normal_cdf(x)"),
    ("normal_pdf(-x)", "normal_pdf(x)"),
    ("erf(y - x)", "-erf(x - y)"),
    ("sign(p)", "1"),
    ("sign(w)", "-1"),
    ("1/(x - 1) - 1/(x + 1)", "2/(x^2 - 1)"),
    ("(x^3 - 1)/(x - 1)", "x^2 + x + 1"),
    ("(x - y)^3/(y - x)", "-(x - y)^2"),
    ("1/(1/x + 1/y)", "x*y/(x + y)"),
    ("(x + y)^4", "x^4 + 4*x^3*y + 6*x^2*y^2 + 4*x*y^3 + y^4"),
    ("1/(x + y)^2", "1/(x^2 + 2*x*y + y^2)"),
    ("(p + sqrt(2))*(p - sqrt(2))", "p^2 - 2"),
    ("(p - 1)/(sqrt(p) - 1)", "sqrt(p) + 1"),
];

/// Factors with positive last terms whose product ends in a negative one: the sign must not get lost.
#[test]
fn the_sign_of_a_product_is_that_of_its_factors() {
    let pool = pool();
    // x before y before z, as the terms are ordered.
    for name in ["x", "y", "z"] {
        parse(&pool, name);
    }
    let product = parse(&pool, "(x + y^2 - y*z)*(x + z - y)");
    let expanded = pool.expand(product);
    assert_ne!(expanded, product);
    for power in ["1", "3"] {
        let power = parse(&pool, power);
        let [a, b] = [product, expanded].map(|e| pool.log(pool.pow(e, power)));
        let difference = pool.sub(a, b);
        assert!(
            pool.normal(difference, Mode::Proof).is_zero(),
            "{}",
            pool.format(a)
        );
    }
}

/// In either mode: one must not hide what the other has lost.
#[test]
fn identities_hold_in_both_modes() {
    for mode in [Mode::Light, Mode::Proof] {
        let pool = pool();
        let mut open = Vec::new();
        for (left, right) in IDENTITIES {
            let difference = pool.sub(parse(&pool, left), parse(&pool, right));
            if !pool.normal(difference, mode).is_zero() {
                open.push(format!("{left} = {right}"));
            }
        }
        assert!(open.is_empty(), "{mode:?}:\n{}", open.join("\n"));
    }
}

/// Fractions that are equal have one normal form, however they were put together.
#[test]
fn equal_fractions_are_one() {
    let pool = pool();
    for (left, right) in [
        ("1/(x^2 - 1)*(1/(x - 1))", "1/((x - 1)^2*(x + 1))"),
        ("1/(x - 1)*(1/(x^2 - 1))", "1/(x^3 - x^2 - x + 1)"),
        ("(x + 1)/(x^2 - 1)", "1/(x - 1)"),
        ("1/((x + y)*(x - y))", "1/(x^2 - y^2)"),
        ("1/(x + y)/(x - y)", "1/(x^2 - y^2)"),
        ("1/(2*x - 2)", "1/(x - 1)/2"),
        ("1/(1 - x)", "-1/(x - 1)"),
        ("x/(x^2 + x)", "1/(x + 1)"),
        ("1/(x*y + y) + 1/y", "(x + 2)/(y*(x + 1))"),
        ("1/(a*x + a*y)", "1/a/(x + y)"),
    ] {
        for mode in [Mode::Light, Mode::Proof] {
            let [a, b] = [left, right].map(|text| pool.normal(parse(&pool, text), mode));
            let normalizer = normalizer(&pool, mode);
            let argument = |f: &Fraction| normalizer.argument(f);
            if mode == Mode::Proof {
                assert_eq!(argument(&a), argument(&b), "{left} and {right}");
            }
            let difference = normalizer.add(&a, &b.negated()).expect("in the budget");
            assert!(difference.is_zero(), "{left} and {right}");
            for (factor, _) in &a.denominator {
                assert_eq!(
                    factor.gcd(&a.numerator, &pool),
                    None,
                    "{left} in lowest terms"
                );
            }
        }
    }
}
