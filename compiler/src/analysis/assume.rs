//! Signs that follow from ranges and from the author's assumptions.

use crate::model::{Model, Relation};
use crate::symbolic::{Expr, Sign};

/// The sign of a formula in the parameters, from their ranges and from the assumptions: a formula
/// that is a positive multiple of the difference of an assumption's sides has that difference's sign.
pub fn sign(model: &Model, e: Expr) -> Sign {
    let pool = &model.pool;
    let known = pool.sign(e);
    if known != Sign::Unknown {
        return known;
    }
    for assumption in &model.assumptions {
        let (large, small, strict) = match assumption.relation {
            Relation::Greater => (assumption.left, assumption.right, true),
            Relation::GreaterEqual => (assumption.left, assumption.right, false),
            Relation::Less => (assumption.right, assumption.left, true),
            Relation::LessEqual => (assumption.right, assumption.left, false),
        };
        let ratio = pool.simplify(pool.div(e, pool.sub(large, small)));
        match (pool.sign(ratio), strict) {
            (Sign::Positive, true) => return Sign::Positive,
            (Sign::Positive, false) => return Sign::NonNegative,
            (Sign::Negative, true) => return Sign::Negative,
            (Sign::Negative, false) => return Sign::NonPositive,
            _ => {}
        }
    }
    Sign::Unknown
}
