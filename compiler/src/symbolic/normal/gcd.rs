//! Greatest common divisors of polynomials in several variables.
//!
//! A modular look first: after all variables but one have been replaced by numbers modulo a prime, a
//! common divisor must show in the remaining one. Most pairs have none and end there. The others go
//! through the primitive polynomial remainder sequence (Knuth, The Art of Computer Programming,
//! volume 2, section 4.6.1), within a budget.

use dashu_base::UnsignedAbs;
use dashu_int::IBig;

use super::integer_poly::{Budget, IntegerPoly};

/// The prime of the modular look, below 2^31 so that products fit.
const PRIME: u64 = 2_147_483_647;

/// The greatest common divisor of two polynomials, up to a number; none if the budget ran out.
pub(super) fn gcd(
    a: &IntegerPoly,
    b: &IntegerPoly,
    variables: usize,
    budget: &mut Budget<'_>,
) -> Option<IntegerPoly> {
    if a.is_zero() {
        return Some(b.primitive());
    }
    if b.is_zero() {
        return Some(a.primitive());
    }
    let one = || IntegerPoly::constant(variables, IBig::ONE);
    let mut shared = Vec::new();
    for variable in 0..variables {
        match (a.degree(variable), b.degree(variable)) {
            (0, 0) => {}
            // A divisor of both is free of a variable that only one of them has.
            (_, 0) => {
                return gcd(
                    &content(a, variable, variables, budget)?,
                    b,
                    variables,
                    budget,
                );
            }
            (0, _) => {
                return gcd(
                    a,
                    &content(b, variable, variables, budget)?,
                    variables,
                    budget,
                );
            }
            (m, n) => shared.push((m.min(n), variable)),
        }
    }
    // Each look reads every variable of every term.
    budget.spend((a.0.len() + b.0.len()) * variables.div_ceil(8) * shared.len())?;
    shared.retain(|&(_, variable)| may_share(a, b, variable));
    // A variable that the divisor lacks need not be in it; without any there is none.
    let Some(&(_, main)) = shared.iter().min() else {
        return Some(one());
    };
    let (content_a, content_b) = (
        content(a, main, variables, budget)?,
        content(b, main, variables, budget)?,
    );
    let common = gcd(&content_a, &content_b, variables, budget)?;
    let (mut u, mut v) = (
        a.exact_quotient(&content_a, budget)?,
        b.exact_quotient(&content_b, budget)?,
    );
    if u.degree(main) < v.degree(main) {
        std::mem::swap(&mut u, &mut v);
    }
    while !v.is_zero() {
        if v.degree(main) == 0 {
            return Some(common.primitive());
        }
        let remainder = pseudo_remainder(u, &v, main, budget)?;
        u = v;
        v = if remainder.is_zero() {
            remainder
        } else {
            let content = content(&remainder, main, variables, budget)?;
            remainder.exact_quotient(&content, budget)?.primitive()
        };
    }
    Some(u.primitive().times(&common, budget)?.primitive())
}

/// The greatest common divisor of the coefficients by powers of one variable.
pub(super) fn content(
    a: &IntegerPoly,
    variable: usize,
    variables: usize,
    budget: &mut Budget<'_>,
) -> Option<IntegerPoly> {
    let mut result = IntegerPoly::default();
    let mut coefficients: Vec<IntegerPoly> = a.coefficients(variable).into_values().collect();
    coefficients.sort_by_key(|c| c.0.len());
    for coefficient in coefficients {
        result = gcd(&result, &coefficient, variables, budget)?;
        if result.is_constant() {
            break;
        }
    }
    Some(result)
}

/// The remainder of a power of `v`'s leading coefficient times `u`, divided by `v`.
fn pseudo_remainder(
    mut u: IntegerPoly,
    v: &IntegerPoly,
    main: usize,
    budget: &mut Budget<'_>,
) -> Option<IntegerPoly> {
    let degree = v.degree(main);
    let lead = v.coefficients(main).remove(&degree)?;
    while !u.is_zero() && u.degree(main) >= degree {
        let top = u.degree(main);
        let top_coefficient = u.coefficients(main).remove(&top)?;
        let scaled = u.times(&lead, budget)?;
        u = scaled.minus(
            &v.times(&top_coefficient, budget)?
                .shifted(main, top - degree),
        );
    }
    Some(u)
}

/// Whether a common divisor could hold the variable: false is certain, true is a guess.
fn may_share(a: &IntegerPoly, b: &IntegerPoly, variable: usize) -> bool {
    let (u, v) = (univariate(a, variable), univariate(b, variable));
    if u.len() != a.degree(variable) as usize + 1 || v.len() != b.degree(variable) as usize + 1 {
        // A leading coefficient vanished at the numbers chosen: no conclusion.
        return true;
    }
    modular_gcd_degree(u, v) > 0
}

/// The polynomial in one variable, the others replaced by fixed numbers, modulo the prime; without
/// leading zeros.
fn univariate(a: &IntegerPoly, variable: usize) -> Vec<u64> {
    let mut result = vec![0; a.degree(variable) as usize + 1];
    for (exponents, value) in &a.0 {
        let mut term = modulo(value);
        for (i, &exponent) in exponents.iter().enumerate() {
            if i != variable {
                let base = 1_000_003u64.wrapping_mul(i as u64 + 17) % PRIME + 29;
                term = term * power(base % PRIME, exponent.into()) % PRIME;
            }
        }
        let slot = &mut result[exponents[variable] as usize];
        *slot = (*slot + term) % PRIME;
    }
    trimmed(result)
}

fn modulo(value: &IBig) -> u64 {
    let size = value.unsigned_abs() % PRIME;
    if *value < IBig::ZERO && size != 0 {
        PRIME - size
    } else {
        size
    }
}

fn power(mut base: u64, mut exponent: u64) -> u64 {
    let mut result = 1;
    while exponent > 0 {
        if exponent & 1 == 1 {
            result = result * base % PRIME;
        }
        base = base * base % PRIME;
        exponent >>= 1;
    }
    result
}

fn trimmed(mut coefficients: Vec<u64>) -> Vec<u64> {
    while coefficients.last() == Some(&0) {
        coefficients.pop();
    }
    coefficients
}

/// The degree of the greatest common divisor modulo the prime, by Euclid's algorithm.
fn modular_gcd_degree(mut u: Vec<u64>, mut v: Vec<u64>) -> usize {
    while !v.is_empty() {
        let inverse = power(v[v.len() - 1], PRIME - 2);
        while u.len() >= v.len() {
            let factor = u[u.len() - 1] * inverse % PRIME;
            let shift = u.len() - v.len();
            for (i, &c) in v.iter().enumerate() {
                u[shift + i] = (u[shift + i] + (PRIME - factor) * c) % PRIME;
            }
            u = trimmed(u);
        }
        std::mem::swap(&mut u, &mut v);
    }
    u.len().saturating_sub(1)
}
