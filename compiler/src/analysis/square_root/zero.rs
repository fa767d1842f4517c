//! What a square-root process does at zero.
//!
//! With `dimension >= 2` it does not get there, below it does (Feller's test; Revuz and Yor 1999, chapter
//! XI). Below 0 it is stopped there. Between 0 and 2 it may be stopped or reflected at once: that is for the
//! model to say. The plain square-root equation itself says reflection, since its drift at 0 leads inward;
//! so does the equation of `x = e + y^r` while its drift at `e` is strictly inward. A Bessel process, whose
//! drift is infinite at 0, is by definition the root of its square, which is reflected. The equation of a
//! constant-elasticity price has neither, and both processes satisfy it.

use super::{Proved, against, margin};
use crate::analysis::assume;
use crate::analysis::asymptotics::{Leading, Side, at_end};
use crate::analysis::limits::Limit;
use crate::analysis::scalar::Scalar;
use crate::model::AtEdge;
use crate::symbolic::{Bound, Expr, Rational, Sign};

/// One over the least exponent of a coordinate: a smaller one takes half the digits of a double.
const COARSEST: u32 = 1 << 26;

/// What a square-root process does at zero.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum AtZero {
    /// It does not get there.
    NotReached,
    /// It is reflected where the dimension is positive, and stays where it is not.
    Reflected,
    /// It stays there, where it gets there.
    Absorbed,
}

/// What happens at zero, and whether that is an open end which may be reached; or why no law is settled.
pub(super) fn settle(scalar: &Scalar<'_>, proved: &Proved) -> Result<(AtZero, bool), String> {
    let declared = &scalar.model.states[scalar.state];
    let [lower, _] = scalar.ends(proved.coordinate.forward);
    let pool = &scalar.model.pool;
    let at_lower = matches!(lower, Limit::Value(v) if pool.is_zero(v).is_yes());
    let (bound, rule, side) = if at_lower {
        (declared.domain.lower, declared.at_lower, Side::Lower)
    } else {
        (declared.domain.upper, declared.at_upper, Side::Upper)
    };
    let end = End {
        scalar,
        proved,
        bound,
        side,
    };
    if let Some(reason) = end.unresolved() {
        return Err(reason);
    }
    if end.against(2).is_non_negative() {
        return Ok((AtZero::NotReached, false));
    }
    match (bound, rule) {
        (Bound::Infinite, _) => Err(end.explodes()),
        (Bound::Open(_), _) => Ok((AtZero::Absorbed, true)),
        (Bound::Closed(_), Some(AtEdge::Absorb)) => Ok((AtZero::Absorbed, false)),
        (Bound::Closed(_), Some(AtEdge::Reflect)) => end.reflected(),
        (Bound::Closed(_), Some(AtEdge::AsEquation) | None) => end.by_the_equation(),
    }
}

/// The end of the domain at which the coordinate is zero.
struct End<'a> {
    scalar: &'a Scalar<'a>,
    proved: &'a Proved,
    bound: Bound,
    side: Side,
}

impl End<'_> {
    /// The sign of `dimension - n`.
    fn against(&self, n: i64) -> Sign {
        against(self.scalar.model, self.proved.level, self.proved.square, n)
    }

    fn margin(&self, n: i64) -> Expr {
        margin(self.scalar.model, self.proved.level, self.proved.square, n)
    }

    fn name(&self) -> &str {
        &self.scalar.model.states[self.scalar.state].name
    }

    fn coordinate(&self) -> String {
        self.scalar
            .model
            .pool
            .format(self.proved.coordinate.forward)
    }

    /// The exponent n of `y = const |x - e|^n` near the end (of `|x|^-n` at an infinite one), if it is a number.
    fn exponent(&self) -> Option<Rational> {
        let model = self.scalar.model;
        let x = model.states[self.scalar.state].symbol;
        let y = self.proved.coordinate.forward;
        match at_end(&model.pool, y, x, self.bound, self.side) {
            Leading::Term { exponent, .. } => Some(exponent),
            Leading::Zero | Leading::Unknown => None,
        }
    }

    /// Why the law cannot be drawn in double precision although it is known.
    fn unresolved(&self) -> Option<String> {
        let least = Rational::from_parts(1.into(), COARSEST.into());
        let exponent = self.exponent()?;
        if exponent >= least {
            return None;
        }
        Some(format!(
            "{} is a square-root process, but so flat a function of {} that double precision, in which it is \
             stepped, cannot tell its values apart",
            self.coordinate(),
            self.name()
        ))
    }

    fn explodes(&self) -> String {
        let margin = self.scalar.model.pool.format(self.margin(2));
        let (name, y) = (self.name(), self.coordinate());
        format!(
            "{y} is a square-root process that reaches 0, where {name} is infinite, unless {margin} >= 0, which \
             does not follow from ranges and assumptions: {name} has no law beyond its explosion"
        )
    }

    fn reflected(&self) -> Result<(AtZero, bool), String> {
        if self.against(0).is_non_negative() {
            return Ok((AtZero::Reflected, false));
        }
        let dimension = self.scalar.model.pool.format(self.proved.dimension);
        Err(format!(
            "{} is a square-root process of dimension {dimension}, which can be reflected at 0 only where that is \
             positive; it does not follow from ranges and assumptions",
            self.coordinate()
        ))
    }

    fn by_the_equation(&self) -> Result<(AtZero, bool), String> {
        if self.against(0).is_non_positive() {
            return Ok((AtZero::Absorbed, false));
        }
        if self.equation_reflects() {
            return Ok((AtZero::Reflected, false));
        }
        let dimension = self.scalar.model.pool.format(self.proved.dimension);
        Err(format!(
            "{} is a square-root process of dimension {dimension}; between 0 and 2 it reaches 0, and the equation of \
             {} does not say what happens there: write `at_edge = \"absorb\"` or `at_edge = \"reflect\"`",
            self.coordinate(),
            self.name()
        ))
    }

    /// Whether the state's equation itself means reflection: `y = const |x - e|^n` near the end.
    fn equation_reflects(&self) -> bool {
        let model = self.scalar.model;
        let pool = &model.pool;
        let Some(n) = self.exponent() else {
            return false;
        };
        let two = Rational::from(2);
        if n == Rational::ONE {
            return true;
        }
        if n == two {
            // At dimension 1 there is no drift that would define what happens.
            return pool.is_zero(self.margin(1)).is_no();
        }
        // The drift of x = e + y^(1/n) at e is finite only for n >= 1, and inward for 2 - n (2 - dimension) > 0.
        let inward = pool.sub(
            pool.mul(pool.number(&n + &n - &two), self.proved.square),
            pool.product([pool.number(n.clone()), pool.int(4), self.proved.level]),
        );
        n > Rational::ONE && n < two && assume::sign(model, pool.simplify(inward)) == Sign::Negative
    }
}
