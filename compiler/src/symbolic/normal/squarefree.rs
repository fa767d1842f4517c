//! A polynomial as a product of powers, found from its derivative (Yun 1976, "On square-free
//! decomposition algorithms").

use dashu_int::IBig;

use super::super::pool::Pool;
use super::convert::Variables;
use super::gcd::{content, gcd};
use super::integer_poly::{Budget, IntegerPoly};
use super::poly::Poly;

/// Factors with their multiplicities.
type Factors = Vec<(Poly, u32)>;

impl Poly {
    /// Whether the sign is turned, and factors with their multiplicities; together they make the
    /// polynomial, up to its positive content and its common monomial. None over budget.
    pub(super) fn squarefree(&self, pool: &Pool) -> Option<(bool, Factors)> {
        let variables = Variables::of(&[self])?;
        let whole = variables.convert(self, pool)?.whole;
        let negative = whole
            .0
            .last_key_value()
            .is_some_and(|(_, value)| *value < IBig::ZERO);
        let mut budget = Budget::share(pool, 2);
        let mut found = Vec::new();
        decompose(
            whole.primitive(),
            0,
            variables.count(),
            &mut found,
            &mut budget,
        )?;
        let factors = found
            .into_iter()
            .map(|(p, m)| Some((variables.restore(&p)?, m)));
        Some((negative, factors.collect::<Option<_>>()?))
    }
}

/// Appends the factors of a polynomial, variable by variable.
fn decompose(
    poly: IntegerPoly,
    variable: usize,
    variables: usize,
    found: &mut Vec<(IntegerPoly, u32)>,
    budget: &mut Budget<'_>,
) -> Option<()> {
    if poly.is_constant() || variable == variables {
        return Some(());
    }
    let free = content(&poly, variable, variables, budget)?;
    let main = poly.exact_quotient(&free, budget)?;
    decompose(free, variable + 1, variables, found, budget)?;
    if main.degree(variable) == 0 {
        return Some(());
    }
    // Yun: with g = gcd(f, f'), the factors of multiplicity i drop out one after the other.
    let mut repeated = gcd(&main, &derivative(&main, variable), variables, budget)?;
    let mut distinct = main.exact_quotient(&repeated, budget)?;
    let mut multiplicity = 1;
    while distinct.degree(variable) > 0 {
        let common = gcd(&distinct, &repeated, variables, budget)?;
        let single = distinct.exact_quotient(&common, budget)?;
        if !single.is_constant() {
            found.push((single.primitive(), multiplicity));
        }
        repeated = repeated.exact_quotient(&common, budget)?;
        distinct = common;
        multiplicity += 1;
    }
    Some(())
}

fn derivative(poly: &IntegerPoly, variable: usize) -> IntegerPoly {
    let mut result = IntegerPoly::default();
    for (exponents, value) in &poly.0 {
        if exponents[variable] > 0 {
            let mut lowered = exponents.clone();
            lowered[variable] -= 1;
            result.add_term(lowered, value * IBig::from(exponents[variable]));
        }
    }
    result
}
