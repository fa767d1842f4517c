//! Coordinates in which a state might be a square-root process.
//!
//! With `b` the noise, `2 sqrt(y)/s` is Lamperti's coordinate `int dx/b` from the right constant on.
//! For `b = s |x - e|^g` that is a power of `x - e`, for `b = s exp(k x)` an exponential; where `b` is
//! constant the drift says where the coordinate starts. In general, with `k1` the derivative of
//! Lamperti's drift along the noise, a square-root process has `k1 = -A/w^2 + B` in `w = 2 sqrt(y)/s`, so that
//! `w = -3 k2/k3` with `k2`, `k3` its next two derivatives along the noise: no antiderivative is needed.

use std::collections::BTreeMap;

use crate::analysis::coordinate::Candidate;
use crate::analysis::scalar::{LARGEST, Scalar};
use crate::symbolic::{Bound, Expr, Interval, Pool, Sign, Symbol, SymbolKind};

/// Candidates, the simplest first.
pub(super) fn candidates(scalar: &Scalar<'_>) -> Vec<Candidate> {
    let search = Search::new(scalar);
    let steepness = search.steepness();
    let mut found = if search.pool.is_zero_literal(steepness) {
        search.squares()
    } else {
        search
            .power(steepness)
            .or_else(|| search.exponential(steepness))
            .into_iter()
            .collect()
    };
    if found.is_empty() {
        found.extend(search.general(steepness));
    }
    found
}

struct Search<'a> {
    scalar: &'a Scalar<'a>,
    pool: &'a Pool,
    x: Symbol,
    y: Symbol,
}

impl<'a> Search<'a> {
    fn new(scalar: &'a Scalar<'a>) -> Self {
        let pool = &scalar.model.pool;
        let declared = &scalar.model.states[scalar.state];
        Self {
            scalar,
            pool,
            x: declared.symbol,
            y: symbol(pool, &declared.name),
        }
    }

    fn x(&self) -> Expr {
        self.pool.var(self.x)
    }

    fn y(&self) -> Expr {
        self.pool.var(self.y)
    }

    /// `b'/b`, from the square of the noise.
    fn steepness(&self) -> Expr {
        let p = self.pool;
        let square = self.scalar.square;
        let slope = p.derivative(square, self.x);
        p.simplify(p.div(slope, p.mul(p.int(2), square)))
    }

    fn candidate(&self, forward: Expr, inverse: Expr) -> Candidate {
        let p = self.pool;
        let forward = p.simplify(forward);
        let itself = forward == self.x();
        Candidate {
            symbol: if itself { self.x } else { self.y },
            forward,
            inverse: if itself { forward } else { p.simplify(inverse) },
            onto_line: false,
        }
    }

    /// `|x - e|` with the sign that it has on the domain, and that sign.
    fn distance(&self, end: Expr) -> Option<(Expr, bool)> {
        let p = self.pool;
        let above = p.simplify(p.sub(self.x(), end));
        match p.sign(above) {
            Sign::Positive | Sign::NonNegative => Some((above, true)),
            Sign::Negative | Sign::NonPositive => Some((p.simplify(p.neg(above)), false)),
            Sign::Zero | Sign::Unknown => None,
        }
    }

    /// `y = |x - e|^n`.
    fn power_from(&self, end: Expr, n: Expr) -> Option<Candidate> {
        let p = self.pool;
        let (distance, above) = self.distance(end)?;
        let root = p.pow(self.y(), p.div(p.one(), n));
        let inverse = if above {
            p.add(end, root)
        } else {
            p.sub(end, root)
        };
        Some(self.candidate(p.pow(distance, n), inverse))
    }

    /// `b = s |x - e|^g`: then `b/b' = (x - e)/g`.
    fn power(&self, steepness: Expr) -> Option<Candidate> {
        let p = self.pool;
        let flatness = p.simplify(p.div(p.one(), steepness));
        let reciprocal = self.scalar.constant(p.derivative(flatness, self.x))?;
        if !p.is_zero(reciprocal).is_no() {
            return None;
        }
        let shifted = p.sub(self.x(), p.div(flatness, reciprocal));
        let end = self.scalar.constant(shifted)?;
        let g = p.div(p.one(), reciprocal);
        let n = p.simplify(p.mul(p.int(2), p.sub(p.one(), g)));
        if !p.is_zero(n).is_no() {
            return None;
        }
        self.power_from(end, n)
    }

    /// `b = s exp(k x)`: then `y = exp(-2 k x)`.
    fn exponential(&self, steepness: Expr) -> Option<Candidate> {
        let p = self.pool;
        let k = self.scalar.constant(steepness)?;
        let twice = p.mul(p.int(-2), k);
        let forward = p.exp(p.mul(twice, self.x()));
        Some(self.candidate(forward, p.div(p.log(self.y()), twice)))
    }

    /// Constant noise: `y = (x - e)^2`. A drift `A/(x - e) + B (x - e)` has `a''/a''' = -(x - e)/3`; without
    /// the first term it is an end of the domain that the process is held at.
    fn squares(&self) -> Vec<Candidate> {
        let p = self.pool;
        let curvature = p.simplify(p.derivative(p.derivative(self.scalar.drift, self.x), self.x));
        let third = p.simplify(p.derivative(curvature, self.x));
        let ends: Vec<Expr> = if p.is_zero_literal(third) {
            let domain = self.scalar.model.states[self.scalar.state].domain;
            [domain.lower, domain.upper]
                .into_iter()
                .filter_map(Bound::value)
                .collect()
        } else {
            let distance = p.mul(p.int(3), p.div(curvature, third));
            self.scalar
                .constant(p.add(self.x(), distance))
                .into_iter()
                .collect()
        };
        ends.into_iter()
            .filter_map(|end| self.power_from(end, p.int(2)))
            .collect()
    }

    /// `y = (3 k2/k3)^2`, with `k1 = a' - a L - b^2 (L' + L^2)/2`, `L = b'/b`, and `(k2/k3)^2 = k1'^2/(b (k1'' +
    /// L k1'))^2`.
    fn general(&self, steepness: Expr) -> Option<Candidate> {
        let p = self.pool;
        let along = |e: Expr| p.derivative(e, self.x);
        let bend = p.add(along(steepness), p.square(steepness));
        let first = p.sub(
            p.sub(
                along(self.scalar.drift),
                p.mul(self.scalar.drift, steepness),
            ),
            p.div(p.mul(self.scalar.square, bend), p.int(2)),
        );
        let slope = p.simplify(along(first));
        if !p.is_zero(slope).is_no() {
            return None;
        }
        let inner = p.simplify(p.add(along(slope), p.mul(steepness, slope)));
        let ratio = p.simplify(p.div(slope, inner));
        let square = p.mul(p.int(9), p.square(ratio));
        // Where the noise has a factor in time, that factor as it is at one time.
        let at_one = BTreeMap::from([(self.scalar.model.time, p.one())]);
        let noise = p.substitute(self.scalar.square, &at_one);
        let forward = p.simplify(p.div(square, noise));
        if p.size(forward) > LARGEST {
            return None;
        }
        let inverse = p.invert(forward, self.x, self.y)?;
        Some(self.candidate(forward, inverse))
    }
}

/// The symbol of a state's square-root coordinate: a name that the model does not use, of values from 0.
fn symbol(pool: &Pool, state: &str) -> Symbol {
    let mut name = format!("y_{state}");
    let symbol = loop {
        match pool.find_symbol(&name) {
            Some(taken) if pool.symbol_kind(taken) != SymbolKind::Auxiliary => name.push('_'),
            Some(known) => break known,
            None => break pool.symbol(&name, SymbolKind::Auxiliary),
        }
    };
    pool.set_range(
        symbol,
        Interval {
            lower: Bound::Closed(pool.zero()),
            upper: Bound::Infinite,
        },
    );
    symbol
}
