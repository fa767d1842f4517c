//! Factors of square-free polynomials beyond what common divisors find: quadratic ones by their
//! discriminant, in one variable also linear ones by their rational roots.
//!
//! No complete factorisation over the rationals, which the proofs here do not need: what counts is that
//! `1 - x^2` under a root or in a logarithm comes apart where the signs of its factors are known.

use dashu_base::UnsignedAbs;
use dashu_int::{IBig, UBig};

use super::super::pool::Pool;
use super::convert::Variables;
use super::integer_poly::{Budget, IntegerPoly};
use super::poly::Poly;

/// Polynomials with more terms are left alone.
const MAX_TERMS: usize = 40;

/// End coefficients of polynomials whose rational roots are looked for.
const MAX_END: u64 = 10_000;

impl Poly {
    /// Whether the sign is turned, and factors that make the polynomial, up to its positive content and
    /// its common monomial. Over budget the polynomial itself is the only factor.
    pub(super) fn rational_factors(&self, pool: &Pool) -> (bool, Vec<Poly>) {
        self.factorised(pool)
            .unwrap_or_else(|| (false, vec![self.clone()]))
    }

    fn factorised(&self, pool: &Pool) -> Option<(bool, Vec<Poly>)> {
        if self.0.len() > MAX_TERMS {
            return None;
        }
        let variables = Variables::of(&[self])?;
        let whole = variables.convert(self, pool)?.whole;
        let turned = leading(&whole)? < &IBig::ZERO;
        let mut budget = Budget::share(pool, 10);
        let (mut done, mut pending) = (Vec::new(), vec![whole.primitive()]);
        while let Some(poly) = pending.pop() {
            match in_two(&poly, variables.count(), &mut budget) {
                Some((one, other)) => pending.extend([one, other]),
                None => done.push(variables.restore(&poly)?),
            }
        }
        Some((turned, done))
    }
}

fn leading(poly: &IntegerPoly) -> Option<&IBig> {
    poly.0.last_key_value().map(|(_, value)| value)
}

/// Two factors, neither of them a number, with positive leading coefficients.
fn in_two(
    poly: &IntegerPoly,
    variables: usize,
    budget: &mut Budget<'_>,
) -> Option<(IntegerPoly, IntegerPoly)> {
    (0..variables).find_map(|variable| {
        let factor = quadratic_factor(poly, variable, budget)
            .or_else(|| linear_factor(poly, variable, budget))?
            .primitive();
        let other = poly.exact_quotient(&factor, budget)?.primitive();
        (!factor.is_constant() && !other.is_constant()).then_some((factor, other))
    })
}

/// A factor of `a*w^2 + b*w + c`, where w is a power of one variable: `2*a*w + b + sqrt(b^2 - 4*a*c)`.
fn quadratic_factor(
    poly: &IntegerPoly,
    variable: usize,
    budget: &mut Budget<'_>,
) -> Option<IntegerPoly> {
    let degree = poly.degree(variable);
    let half = degree / 2;
    let mut coefficients = poly.coefficients(variable);
    if degree < 2
        || coefficients
            .keys()
            .any(|&e| !e.is_multiple_of(half) || !degree.is_multiple_of(2))
    {
        return None;
    }
    let mut take = |power: u32| coefficients.remove(&power).unwrap_or_default();
    let (a, b, c) = (take(degree), take(half), take(0));
    let four = IntegerPoly::constant(poly.0.keys().next()?.len(), IBig::from(4));
    let product = a.times(&c, budget)?.times(&four, budget)?;
    let root = square_root(&b.times(&b, budget)?.minus(&product), budget)?;
    let zero = IntegerPoly::default();
    let rest = zero.clone().minus(&b).minus(&root);
    let twice = a.shifted(variable, half);
    Some(twice.clone().minus(&zero.minus(&twice)).minus(&rest))
}

/// The polynomial whose square it is, term by term from the leading one.
fn square_root(poly: &IntegerPoly, budget: &mut Budget<'_>) -> Option<IntegerPoly> {
    let Some((exponents, value)) = poly.0.last_key_value() else {
        return Some(IntegerPoly::default());
    };
    if *value < IBig::ZERO || exponents.iter().any(|e| e % 2 != 0) {
        return None;
    }
    let lead = super::super::power::exact_root(&value.unsigned_abs(), 2)?;
    let lead_exponents: Box<[u32]> = exponents.iter().map(|e| e / 2).collect();
    let mut root = IntegerPoly::default();
    root.add_term(lead_exponents.clone(), IBig::from(lead.clone()));
    let twice = IBig::from(lead) * IBig::from(2);
    loop {
        let rest = poly.clone().minus(&root.times(&root, budget)?);
        let Some((top, value)) = rest.0.last_key_value() else {
            return Some(root);
        };
        let exponents: Box<[u32]> = top
            .iter()
            .zip(&lead_exponents)
            .map(|(a, b)| a.checked_sub(*b))
            .collect::<Option<_>>()?;
        // A term that is not below all others would change what has been settled.
        let below = root.0.keys().next().is_some_and(|least| exponents < *least);
        if !below || !(value % &twice).is_zero() {
            return None;
        }
        root.add_term(exponents, value / &twice);
    }
}

/// `q*x - p` for a rational root p/q of a polynomial in one variable.
fn linear_factor(
    poly: &IntegerPoly,
    variable: usize,
    budget: &mut Budget<'_>,
) -> Option<IntegerPoly> {
    let degree = poly.degree(variable);
    let alone = |exponents: &[u32]| {
        exponents
            .iter()
            .enumerate()
            .all(|(i, &e)| i == variable || e == 0)
    };
    if degree < 3 || !poly.0.keys().all(|exponents| alone(exponents)) {
        return None;
    }
    let coefficients = poly.coefficients(variable);
    let end = |power: u32| -> Option<u64> {
        let size: UBig = leading(coefficients.get(&power)?)?.unsigned_abs();
        u64::try_from(size).ok().filter(|size| *size <= MAX_END)
    };
    let (last, first) = (divisors(end(0)?), divisors(end(degree)?));
    let variables = poly.0.keys().next()?.len();
    for q in &first {
        for p in &last {
            for p in [IBig::from(*p), -IBig::from(*p)] {
                budget.spend(poly.0.len())?;
                if !is_root(poly, variable, &p, &IBig::from(*q)) {
                    continue;
                }
                let factor = IntegerPoly::constant(variables, IBig::from(*q)).shifted(variable, 1);
                return Some(factor.minus(&IntegerPoly::constant(variables, p)));
            }
        }
    }
    None
}

/// Whether p/q is a root: the polynomial times a power of q is evaluated.
fn is_root(poly: &IntegerPoly, variable: usize, p: &IBig, q: &IBig) -> bool {
    let degree = poly.degree(variable);
    let value = poly.0.iter().fold(IBig::ZERO, |sum, (exponents, value)| {
        let e = exponents[variable];
        sum + value * p.pow(e as usize) * q.pow((degree - e) as usize)
    });
    value.is_zero()
}

fn divisors(number: u64) -> Vec<u64> {
    (1..=number).filter(|d| number.is_multiple_of(*d)).collect()
}
