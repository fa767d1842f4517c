//! Signs that follow from ranges and from the author's assumptions.

use crate::model::{Model, Relation};
use crate::symbolic::{Expr, Sign};

/// Parts of an assumption that are tried: the coefficients of conditions such as `2*kappa*theta >= sigma^2` differ by
/// powers of two.
const PARTS: [(i64, i64); 7] = [(1, 1), (1, 2), (1, 4), (1, 8), (2, 1), (4, 1), (8, 1)];

/// The sign of a formula in the parameters, from their ranges and from the assumptions: a formula
/// that is a positive multiple of the difference of an assumption's sides has that difference's sign, and so has one
/// that exceeds a part of it by something of the same sign.
pub fn sign(model: &Model, e: Expr) -> Sign {
    let pool = &model.pool;
    let known = pool.sign(e);
    if known != Sign::Unknown {
        return known;
    }
    let differences: Vec<(Expr, bool)> = model
        .assumptions
        .iter()
        .map(|assumption| {
            let (large, small, strict) = match assumption.relation {
                Relation::Greater => (assumption.left, assumption.right, true),
                Relation::GreaterEqual => (assumption.left, assumption.right, false),
                Relation::Less => (assumption.right, assumption.left, true),
                Relation::LessEqual => (assumption.right, assumption.left, false),
            };
            (pool.sub(large, small), strict)
        })
        .collect();
    for &(difference, strict) in &differences {
        let ratio = pool.simplify(pool.div(e, difference));
        match (pool.sign(ratio), strict) {
            (Sign::Positive, true) => return Sign::Positive,
            (Sign::Positive, false) => return Sign::NonNegative,
            (Sign::Negative, true) => return Sign::Negative,
            (Sign::Negative, false) => return Sign::NonPositive,
            _ => {}
        }
    }
    let beyond = differences
        .iter()
        .flat_map(|&(difference, strict)| PARTS.map(|part| (difference, strict, part)))
        .find_map(|(difference, strict, (n, d))| {
            let part = pool.mul(pool.ratio(n, d), difference);
            let above = pool.sign(pool.simplify(pool.sub(e, part)));
            let below = pool.sign(pool.simplify(pool.add(e, part)));
            match (above.is_non_negative(), below.is_non_positive()) {
                (true, _) if strict || above.is_positive() => Some(Sign::Positive),
                (true, _) => Some(Sign::NonNegative),
                (_, true) if strict || below == Sign::Negative => Some(Sign::Negative),
                (_, true) => Some(Sign::NonPositive),
                _ => None,
            }
        });
    beyond.unwrap_or(Sign::Unknown)
}
