//! Tests of the normal form and of the polynomials under it.

mod divisors;
mod exponents;
mod factors;
mod identities;
mod polynomials;
mod turns;
mod values;

use super::poly::Poly;
use super::{Mode, Normalizer};
use crate::symbolic::Pool;
use crate::symbolic::tests::parse;

fn normalizer(pool: &Pool, mode: Mode) -> Normalizer<'_> {
    Normalizer { pool, mode }
}

/// The polynomial a text stands for.
fn poly(pool: &Pool, text: &str) -> Poly {
    let normal = pool.normal(parse(pool, text), Mode::Light);
    assert!(normal.denominator.is_empty(), "{text}");
    normal.numerator.clone()
}

/// Whether two polynomials are equal up to a number.
fn proportional(pool: &Pool, a: &Poly, b: &Poly) -> bool {
    let normalizer = normalizer(pool, Mode::Light);
    let bare = |p: &Poly| {
        normalizer
            .factored(p)
            .map(|(_, monomial, factor)| (monomial, factor))
    };
    bare(a) == bare(b)
}
