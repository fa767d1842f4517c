//! Coordinates in which a state's noise may become constant.
//!
//! If the noise of a state is `g(x) c` with `c` free of the states, then `u = int dx/g(x)` has constant
//! noise `c` (Lamperti's transform). Each row of the table below is the antiderivative for one `g`
//! on the domain on which it maps onto the whole line, with its inverse; only such a map can carry a
//! Brownian motion or an Ornstein-Uhlenbeck process, which leave every smaller interval.

use super::free::{Freedom, free_of};
use super::limits::{Limit, limit};
use crate::model::{Model, State};
use crate::symbolic::{Bound, Expr, Function, Pool, Sign, Symbol, SymbolKind};

/// A coordinate `u = forward(x)` of one state.
#[derive(Clone, Debug)]
pub struct Candidate {
    /// The symbol of u; the state's own for the identity.
    pub symbol: Symbol,
    /// u in the state, time and parameters.
    pub forward: Expr,
    /// The state in u, time and parameters.
    pub inverse: Expr,
    /// Whether the domain is mapped onto the whole line.
    pub onto_line: bool,
}

impl Candidate {
    /// The state itself.
    pub fn identity(pool: &Pool, state: &State) -> Self {
        let x = pool.var(state.symbol);
        let whole = matches!(
            (state.domain.lower, state.domain.upper),
            (Bound::Infinite, Bound::Infinite)
        );
        Self {
            symbol: state.symbol,
            forward: x,
            inverse: x,
            onto_line: whole,
        }
    }

    /// Whether the coordinate is an affine function of the state `x`.
    pub fn is_affine(&self, pool: &Pool, x: Symbol) -> bool {
        let slope = pool.derivative(self.forward, x);
        matches!(free_of(pool, slope, &[x]), Freedom::Free(_))
    }

    /// Whether the coordinate is the state itself.
    pub fn is_identity(&self) -> bool {
        self.forward == self.inverse
    }
}

/// The candidates of a state, best first: the author's `through` where there is one, then the table's
/// rows for the state's domain and the identity.
///
/// `noise` is a non-zero coefficient of the state's noise that depends on no other state, if there is
/// one; some rows take their constants from it.
pub fn candidates(model: &Model, state: &State, noise: Option<Expr>) -> Vec<Candidate> {
    let pool = &model.pool;
    let mut found: Vec<Candidate> = through(model, state).into_iter().collect();
    for row in table(pool, state, noise) {
        if found.iter().all(|c| c.forward != row.forward) {
            found.push(row);
        }
    }
    if noise.is_none() && !found.iter().any(Candidate::is_identity) {
        found.push(Candidate::identity(pool, state));
    }
    found
}

/// The rows of the table for a state's domain.
fn table(pool: &Pool, state: &State, noise: Option<Expr>) -> Vec<Candidate> {
    let row = Row {
        pool,
        x: state.symbol,
        u: auxiliary(pool, &state.name),
    };
    let mut found = Vec::new();
    match (state.domain.lower, state.domain.upper) {
        (Bound::Infinite, Bound::Infinite) => {
            found.push(Candidate::identity(pool, state));
            found.extend(noise.and_then(|b| row.asinh(b)));
            found.extend(noise.and_then(|b| row.sinh(b)));
        }
        (Bound::Open(lower), Bound::Infinite) => {
            found.push(row.log_above(lower));
            found.extend(noise.and_then(|b| row.softplus(b, lower)));
        }
        (Bound::Infinite, Bound::Open(upper)) => found.push(row.log_below(upper)),
        (Bound::Open(lower), Bound::Open(upper)) => {
            found.push(row.logit(lower, upper));
            found.extend(row.normal_quantile(lower, upper));
        }
        _ => {}
    }
    found
}

/// The coordinate the author asked for; none without a `through` or where it cannot be inverted.
pub fn through(model: &Model, state: &State) -> Option<Candidate> {
    let pool = &model.pool;
    let forward = pool.simplify(state.through.as_ref()?.expr);
    if forward == pool.var(state.symbol) {
        return Some(Candidate::identity(pool, state));
    }
    let u = auxiliary(pool, &state.name);
    let known = table(pool, state, None);
    let affine = known
        .iter()
        .find_map(|row| affine_image(pool, state.symbol, u, forward, row));
    affine.or_else(|| {
        let inverse = pool.invert(forward, state.symbol, u)?;
        let end = |bound: Bound, infinite: Limit| bound.value().map_or(infinite, Limit::Value);
        let at = |end: Limit| limit(pool, forward, state.symbol, end);
        let lower = at(end(state.domain.lower, Limit::MinusInfinity));
        let upper = at(end(state.domain.upper, Limit::PlusInfinity));
        let onto_line = lower.is_infinite() && upper.is_infinite();
        Some(Candidate {
            symbol: u,
            forward,
            inverse,
            onto_line,
        })
    })
}

/// A formula that is `scale*row + shift` for a row of the table, scale and shift free of the state, so
/// that the row's inverse serves.
fn affine_image(
    pool: &Pool,
    x: Symbol,
    u: Symbol,
    forward: Expr,
    row: &Candidate,
) -> Option<Candidate> {
    let free = |e: Expr| match free_of(pool, e, &[x]) {
        Freedom::Free(value) => Some(value),
        Freedom::DependsOn(_) | Freedom::CannotTell(_) => None,
    };
    let slope = pool.derivative(row.forward, x);
    let scale = free(pool.div(pool.derivative(forward, x), slope))?;
    if !matches!(pool.sign(scale), Sign::Positive | Sign::Negative) {
        return None;
    }
    let shift = free(pool.sub(forward, pool.mul(scale, row.forward)))?;
    let level = pool.simplify(pool.div(pool.sub(pool.var(u), shift), scale));
    let inverse = pool.substitute(row.inverse, &[(row.symbol, level)].into_iter().collect());
    Some(Candidate {
        symbol: u,
        forward,
        inverse,
        onto_line: row.onto_line,
    })
}

/// The symbol of a state's coordinate: a name that the model does not use.
pub fn auxiliary(pool: &Pool, state: &str) -> Symbol {
    let mut name = format!("u_{state}");
    while let Some(taken) = pool.find_symbol(&name) {
        if pool.symbol_kind(taken) == SymbolKind::Auxiliary {
            return taken;
        }
        name.push('_');
    }
    pool.symbol(&name, SymbolKind::Auxiliary)
}

/// The rows of the table for one state `x` and its coordinate `u`.
struct Row<'a> {
    pool: &'a Pool,
    x: Symbol,
    u: Symbol,
}

impl Row<'_> {
    fn candidate(&self, forward: Expr, inverse: Expr) -> Candidate {
        Candidate {
            symbol: self.u,
            forward,
            inverse,
            onto_line: true,
        }
    }

    fn x(&self) -> Expr {
        self.pool.var(self.x)
    }

    fn u(&self) -> Expr {
        self.pool.var(self.u)
    }

    /// g = x - e on (e, inf): u = log(x - e).
    fn log_above(&self, end: Expr) -> Candidate {
        let p = self.pool;
        self.candidate(p.log(p.sub(self.x(), end)), p.add(end, p.exp(self.u())))
    }

    /// g = e - x on (-inf, e): u = log(e - x).
    fn log_below(&self, end: Expr) -> Candidate {
        let p = self.pool;
        self.candidate(p.log(p.sub(end, self.x())), p.sub(end, p.exp(self.u())))
    }

    /// g = (x - l)(h - x) on (l, h): u = log((x - l)/(h - x)), the logit.
    fn logit(&self, lower: Expr, upper: Expr) -> Candidate {
        let p = self.pool;
        let odds = p.div(p.sub(self.x(), lower), p.sub(upper, self.x()));
        let tail = p.add(p.one(), p.exp(p.neg(self.u())));
        let inverse = p.add(lower, p.div(p.simplify(p.sub(upper, lower)), tail));
        self.candidate(p.log(odds), inverse)
    }

    /// g = phi(Phi^-1(x)) on (0, 1), scaled to (l, h): u = Phi^-1((x - l)/(h - l)), the probit.
    fn normal_quantile(&self, lower: Expr, upper: Expr) -> Option<Candidate> {
        let p = self.pool;
        let width = p.simplify(p.sub(upper, lower));
        let share = p.simplify(p.div(p.sub(self.x(), lower), width));
        let inverse = p.add(
            lower,
            p.mul(width, p.call(Function::NormalCdf, &[self.u()])),
        );
        Some(self.candidate(p.call(Function::NormalQuantile, &[share]), inverse))
    }

    /// g^2 = x^2 + 2 m x + n with n > m^2 on the line: u = asinh((x + m)/sqrt(n - m^2)).
    fn asinh(&self, noise: Expr) -> Option<Candidate> {
        let p = self.pool;
        let square = p.square(noise);
        let slope = p.derivative(square, self.x);
        let leading = self.constant(p.div(p.derivative(slope, self.x), p.int(2)))?;
        if p.is_zero_literal(leading) {
            return None;
        }
        let linear = self.constant(p.sub(slope, p.product([p.int(2), leading, self.x()])))?;
        let powers = p.add(p.mul(leading, p.square(self.x())), p.mul(linear, self.x()));
        let constant = self.constant(p.sub(square, powers))?;
        let over = |c: Expr| p.simplify(p.div(c, leading));
        let middle = p.div(over(linear), p.int(2));
        let rest = p.simplify(p.sub(over(constant), p.square(middle)));
        if !p.sign(rest).is_positive() {
            return None;
        }
        let scale = p.simplify(p.sqrt(rest));
        let forward = p.call(Function::Asinh, &[p.div(p.add(self.x(), middle), scale)]);
        let inverse = p.sub(p.mul(scale, p.call(Function::Sinh, &[self.u()])), middle);
        Some(self.candidate(forward, inverse))
    }

    /// g = 1/cosh(k x) on the line: u = sinh(k x). With r = g'/g, k^2 = r^2 - r'.
    fn sinh(&self, noise: Expr) -> Option<Candidate> {
        let p = self.pool;
        let rate = self.log_derivative(noise);
        let square = p.sub(p.square(rate), p.derivative(rate, self.x));
        let k = p.simplify(p.sqrt(self.constant(square)?));
        if !p.sign(k).is_positive() {
            return None;
        }
        let forward = p.call(Function::Sinh, &[p.mul(k, self.x())]);
        Some(self.candidate(forward, p.div(p.call(Function::Asinh, &[self.u()]), k)))
    }

    /// g = 1 - exp(-k (x - e)) on (e, inf): u = log(exp(k (x - e)) - 1). With r = g'/g, k = -(r + r'/r).
    fn softplus(&self, noise: Expr, end: Expr) -> Option<Candidate> {
        let p = self.pool;
        let rate = self.log_derivative(noise);
        if p.is_zero_literal(p.simplify(rate)) {
            return None;
        }
        let sum = p.add(rate, p.div(p.derivative(rate, self.x), rate));
        let k = self.constant(p.neg(sum))?;
        if !p.sign(k).is_positive() {
            return None;
        }
        let shifted = p.mul(k, p.sub(self.x(), end));
        let forward = p.log(p.sub(p.exp(shifted), p.one()));
        let grown = p.log(p.add(p.one(), p.exp(self.u())));
        Some(self.candidate(forward, p.add(end, p.div(grown, k))))
    }

    fn log_derivative(&self, noise: Expr) -> Expr {
        self.pool.div(self.pool.derivative(noise, self.x), noise)
    }

    fn constant(&self, e: Expr) -> Option<Expr> {
        match free_of(self.pool, e, &[self.x]) {
            Freedom::Free(value) => Some(value),
            Freedom::DependsOn(_) | Freedom::CannotTell(_) => None,
        }
    }
}
