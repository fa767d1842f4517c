//! Polynomials with whole coefficients and whole exponents in numbered variables: the form in which
//! division and greatest common divisors are computed.

use std::collections::BTreeMap;

use dashu_base::{Gcd, UnsignedAbs};
use dashu_int::{IBig, UBig};

use super::super::limit::Limit;
use super::super::pool::Pool;

/// Exponents of all variables to coefficient. The last key is the leading term in lexicographic
/// order.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(super) struct IntegerPoly(pub(super) BTreeMap<Box<[u32]>, IBig>);

/// What one computation may still spend, in term operations. What it spends counts for the model too.
pub(super) struct Budget<'a> {
    left: u64,
    pool: &'a Pool,
}

impl<'a> Budget<'a> {
    /// A share of the budget of one division or common divisor.
    pub(super) fn share(pool: &'a Pool, divisor: u64) -> Self {
        Budget {
            left: Limit::Division.amount() / divisor,
            pool,
        }
    }

    pub(super) fn spend(&mut self, amount: usize) -> Option<()> {
        let amount = amount as u64;
        if amount > self.left {
            self.pool.exceed(Limit::Division);
            return None;
        }
        self.left -= amount;
        self.pool.may_spend_all(amount).then_some(())
    }
}

impl IntegerPoly {
    pub(super) fn constant(variables: usize, value: IBig) -> IntegerPoly {
        let mut poly = IntegerPoly::default();
        poly.add_term(vec![0; variables].into(), value);
        poly
    }

    pub(super) fn is_zero(&self) -> bool {
        self.0.is_empty()
    }

    pub(super) fn is_constant(&self) -> bool {
        self.0
            .keys()
            .all(|exponents| exponents.iter().all(|&e| e == 0))
    }

    pub(super) fn add_term(&mut self, exponents: Box<[u32]>, value: IBig) {
        use std::collections::btree_map::Entry;
        match self.0.entry(exponents) {
            Entry::Vacant(entry) => {
                if !value.is_zero() {
                    entry.insert(value);
                }
            }
            Entry::Occupied(mut entry) => {
                *entry.get_mut() += value;
                if entry.get().is_zero() {
                    entry.remove();
                }
            }
        }
    }

    pub(super) fn times(
        &self,
        other: &IntegerPoly,
        budget: &mut Budget<'_>,
    ) -> Option<IntegerPoly> {
        budget.spend(self.0.len() * other.0.len())?;
        let mut result = IntegerPoly::default();
        for (a, x) in &self.0 {
            for (b, y) in &other.0 {
                result.add_term(a.iter().zip(b).map(|(i, j)| i + j).collect(), x * y);
            }
        }
        Some(result)
    }

    pub(super) fn minus(mut self, other: &IntegerPoly) -> IntegerPoly {
        for (exponents, value) in &other.0 {
            self.add_term(exponents.clone(), -value);
        }
        self
    }

    pub(super) fn degree(&self, variable: usize) -> u32 {
        self.0
            .keys()
            .map(|exponents| exponents[variable])
            .max()
            .unwrap_or(0)
    }

    /// The coefficients by powers of one variable; a coefficient keeps all variables, that one with
    /// exponent 0.
    pub(super) fn coefficients(&self, variable: usize) -> BTreeMap<u32, IntegerPoly> {
        let mut result: BTreeMap<u32, IntegerPoly> = BTreeMap::new();
        for (exponents, value) in &self.0 {
            let mut rest = exponents.clone();
            rest[variable] = 0;
            result
                .entry(exponents[variable])
                .or_default()
                .add_term(rest, value.clone());
        }
        result
    }

    /// The polynomial times a power of one variable.
    pub(super) fn shifted(&self, variable: usize, by: u32) -> IntegerPoly {
        let shift = |exponents: &[u32]| {
            let mut moved: Box<[u32]> = exponents.into();
            moved[variable] += by;
            moved
        };
        IntegerPoly(self.0.iter().map(|(e, v)| (shift(e), v.clone())).collect())
    }

    /// The polynomial divided by the greatest common divisor of its coefficients, with a positive
    /// leading coefficient.
    pub(super) fn primitive(&self) -> IntegerPoly {
        let content = self.0.values().fold(UBig::ZERO, |g, v| {
            if g.is_zero() {
                v.unsigned_abs()
            } else {
                g.gcd(v.unsigned_abs())
            }
        });
        let Some((_, lead)) = self.0.last_key_value() else {
            return self.clone();
        };
        let content = if *lead < IBig::ZERO {
            -IBig::from(content)
        } else {
            IBig::from(content)
        };
        IntegerPoly(
            self.0
                .iter()
                .map(|(e, v)| (e.clone(), v / &content))
                .collect(),
        )
    }

    /// The exact quotient, if there is one with whole coefficients.
    pub(super) fn exact_quotient(
        &self,
        divisor: &IntegerPoly,
        budget: &mut Budget<'_>,
    ) -> Option<IntegerPoly> {
        let (lead, lead_value) = divisor.0.last_key_value()?;
        let mut rest = self.clone();
        let mut quotient = IntegerPoly::default();
        while let Some((top, value)) = rest.0.last_key_value() {
            let exponents: Box<[u32]> = top
                .iter()
                .zip(lead)
                .map(|(a, b)| a.checked_sub(*b))
                .collect::<Option<_>>()?;
            let (factor, remainder) = (value / lead_value, value % lead_value);
            if !remainder.is_zero() {
                return None;
            }
            budget.spend(divisor.0.len())?;
            for (e, v) in &divisor.0 {
                rest.add_term(
                    e.iter().zip(&exponents).map(|(a, b)| a + b).collect(),
                    -(v * &factor),
                );
            }
            quotient.add_term(exponents, factor);
        }
        Some(quotient)
    }
}
