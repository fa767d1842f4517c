//! Monomials and polynomials against evaluation, and what all terms have in common.

use std::collections::BTreeMap;

use super::{normalizer, poly};
use crate::symbolic::normal::Mode;
use crate::symbolic::normal::exponent::Exponent;
use crate::symbolic::normal::poly::{Monomial, Poly};
use crate::symbolic::tests::{parse, pool};
use crate::symbolic::{Expr, Pool, Rational};

fn monomial(kernels: &[Expr], exponents: &[i64]) -> Monomial {
    let pairs = kernels.iter().zip(exponents).filter(|(_, e)| **e != 0);
    Monomial(pairs.map(|(&k, &e)| (k, Exponent::whole(e))).collect())
}

#[test]
fn monomials_multiply_by_adding_exponents() {
    let pool = pool();
    let mut kernels = ["x", "y", "z"].map(|name| parse(&pool, name));
    kernels.sort_unstable();
    let exponents = || {
        (-1..=1i64).flat_map(|i| (-1..=1i64).flat_map(move |j| (-1..=2i64).map(move |k| [i, j, k])))
    };
    for a in exponents() {
        let left = monomial(&kernels, &a);
        assert_eq!(left.is_one(), a == [0, 0, 0]);
        assert_eq!(left.inverse(), Some(monomial(&kernels, &a.map(|e| -e))));
        assert_eq!(
            left.raised(Exponent::whole(3)),
            Some(monomial(&kernels, &a.map(|e| 3 * e)))
        );
        assert_eq!(left.raised(Exponent::ZERO), Some(Monomial::one()));
        for i in 0..3 {
            assert_eq!(left.exponent(kernels[i]), Exponent::whole(a[i]));
            let mut rest = a;
            rest[i] = 0;
            assert_eq!(left.without(kernels[i]), monomial(&kernels, &rest));
        }
        for b in exponents() {
            let sum = [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
            let right = monomial(&kernels, &b);
            assert_eq!(
                left.times(&right),
                Some(monomial(&kernels, &sum)),
                "{a:?} {b:?}"
            );
        }
    }
}

fn value(pool: &Pool, p: &Poly) -> Rational {
    let names = [("x", (3, 2)), ("y", (-2, 5)), ("z", (7, 3)), ("a", (5, 1))];
    let values: BTreeMap<Expr, Rational> = names
        .into_iter()
        .map(|(name, (n, d))| {
            (
                parse(pool, name),
                Rational::from_parts(i64::into(n), u64::into(d)),
            )
        })
        .collect();
    p.0.iter().fold(Rational::ZERO, |sum, (m, c)| {
        let term = m.0.iter().fold(c.clone(), |product, (kernel, e)| {
            let n = e.as_whole().expect("a whole exponent");
            product * values[kernel].clone().pow(n as isize)
        });
        sum + term
    })
}

#[test]
fn sums_and_products_have_the_values_of_theirs() {
    let pool = pool();
    let all: Vec<Poly> = [
        "x + y",
        "x - y/2",
        "3*x*z - 1/x + 2",
        "a^2 - x*y*z",
        "5",
        "0",
        "x - 1",
        "1/x - y",
    ]
    .iter()
    .map(|text| poly(&pool, text))
    .collect();
    for a in &all {
        assert_eq!(value(&pool, &a.negated()), -value(&pool, a));
        let third = Rational::from_parts(1.into(), 3u8.into());
        assert_eq!(value(&pool, &a.scaled(&third)), value(&pool, a) * &third);
        assert!(a.scaled(&Rational::ZERO).is_zero());
        assert_eq!(a.is_zero(), a.0.is_empty());
        let number = a.0.keys().all(Monomial::is_one).then(|| value(&pool, a));
        assert_eq!(a.as_constant(), number);
        assert_eq!(a.is_one(), number == Some(Rational::ONE));
        for b in &all {
            let product = a.raw_product(b, &pool).expect("a small product");
            assert_eq!(value(&pool, &product), value(&pool, a) * value(&pool, b));
            let mut sum = a.clone();
            sum.add_assign(b);
            assert_eq!(value(&pool, &sum), value(&pool, a) + value(&pool, b));
            for p in [&sum, &product] {
                assert!(p.0.values().all(|c| !c.is_zero()));
            }
        }
    }
}

#[test]
fn what_all_terms_share_comes_out() {
    let pool = pool();
    for (text, content, common) in [
        ("6*x^2*y + 4*x*y^3", "2", "x*y"),
        ("x/2 + x^2/3", "1/6", "x"),
        ("10/21*x - 4/35*y", "2/105", "1"),
        ("x^3/y - x^2/y^2", "1", "x^2/y^2"),
        ("x + 1/x", "1", "1/x"),
        ("-9*x", "9", "x"),
        ("x*sqrt(p) + p", "1", "sqrt(p)"),
    ] {
        let p = poly(&pool, text);
        let constant = pool.as_number(parse(&pool, content)).expect("a number");
        assert_eq!(p.positive_content(&pool), Some(constant.clone()), "{text}");
        let monomial = poly(&pool, common);
        let (shared, _) = monomial.as_term().expect("a term");
        assert_eq!(p.common_monomial(), *shared, "{text}");
        let normalizer = normalizer(&pool, Mode::Light);
        let (number, monomial, factor) = normalizer.factored(&p).expect("not zero");
        assert_eq!(
            if number < Rational::ZERO {
                -number.clone()
            } else {
                number.clone()
            },
            constant
        );
        assert!(factor.leading_coefficient() > Rational::ZERO, "{text}");
        let back = factor
            .times_monomial(&monomial)
            .expect("a small product")
            .scaled(&number);
        assert_eq!(back, p, "{text}");
    }
}
