//! Coordinates in which the drift of a state might have a random sign.
//!
//! With `b` the noise, Lamperti's coordinate has the drift `q = a/b - b'/2`, and the class has
//! `b q' + q^2 = r > 0` constant: no antiderivative is needed to see that. Then `(sqrt(r) + q)/(sqrt(r) - q)`, or its
//! negative on the half line, is the exponential of twice `sqrt(r)` times Lamperti's coordinate, up to a factor.

use super::Shape;
use crate::analysis::coordinate::{self, Candidate};
use crate::analysis::scalar::{LARGEST, Scalar};
use crate::symbolic::{Bound, Expr};

/// Candidates, the simplest first.
pub(super) fn candidates(scalar: &Scalar<'_>) -> Vec<(Shape, Candidate)> {
    let Some((speed, drift)) = scalar.speed() else {
        return Vec::new();
    };
    let pool = &scalar.model.pool;
    let noise = pool.simplify(pool.sqrt(scalar.square));
    let known = coordinate::candidates(scalar.model, scalar.declared(), Some(noise));
    let mut found: Vec<(Shape, Candidate)> = known
        .into_iter()
        .filter(|candidate| candidate.onto_line)
        .map(|candidate| (Shape::Line, candidate))
        .collect();
    found.extend(scalar.distances().map(|c| (Shape::HalfLine, c)));
    for shape in [Shape::Line, Shape::HalfLine] {
        let rest = match shape {
            Shape::Line => pool.sub(speed, drift),
            Shape::HalfLine => pool.sub(drift, speed),
        };
        let odds = pool.div(pool.add(speed, drift), rest);
        found.extend(scalar.half_log(odds).map(|candidate| (shape, candidate)));
    }
    found
}

impl Scalar<'_> {
    /// `sqrt(r)` and `q`, if `r` is a constant that may be positive.
    fn speed(&self) -> Option<(Expr, Expr)> {
        let pool = &self.model.pool;
        let noise = pool.simplify(pool.sqrt(self.square));
        let half = pool.div(self.along(noise), pool.int(2));
        let drift = pool.simplify(pool.sub(pool.div(self.drift, noise), half));
        let along = pool.mul(noise, self.along(drift));
        let size = self.size(pool.add(along, pool.square(drift)))?;
        Some((pool.simplify(pool.sqrt(size)), drift))
    }

    /// The distances from the finite ends of the domain.
    fn distances(&self) -> impl Iterator<Item = Candidate> {
        let (pool, declared) = (&self.model.pool, self.declared());
        let x = pool.var(declared.symbol);
        let symbol = coordinate::auxiliary(pool, &declared.name);
        let u = pool.var(symbol);
        let distance = |bound: Bound, above: bool| {
            let end = bound.value()?;
            let (forward, inverse) = if above {
                (pool.sub(x, end), pool.add(end, u))
            } else {
                (pool.sub(end, x), pool.sub(end, u))
            };
            let forward = pool.simplify(forward);
            let itself = forward == x;
            Some(Candidate {
                symbol: if itself { declared.symbol } else { symbol },
                forward,
                inverse: if itself { x } else { pool.simplify(inverse) },
                onto_line: false,
            })
        };
        let lower = distance(declared.domain.lower, true);
        lower
            .into_iter()
            .chain(distance(declared.domain.upper, false))
    }

    /// Half the logarithm of `odds`, if that can be inverted.
    fn half_log(&self, odds: Expr) -> Option<Candidate> {
        let (pool, declared) = (&self.model.pool, self.declared());
        let odds = pool.in_exponentials(odds);
        let forward = pool.simplify(pool.mul(pool.ratio(1, 2), pool.log(odds)));
        if pool.size(forward) > LARGEST {
            return None;
        }
        let symbol = coordinate::auxiliary(pool, &declared.name);
        let inverse = pool.invert(forward, declared.symbol, symbol)?;
        Some(Candidate {
            symbol,
            forward,
            inverse: pool.simplify(inverse),
            onto_line: false,
        })
    }
}
