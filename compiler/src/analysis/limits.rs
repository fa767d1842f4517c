//! Limits of a formula at an end of an interval, as far as a table of rules goes.
//!
//! Used for one question: does a strictly monotone map take a domain onto the whole line? A limit
//! that the rules do not settle is "unknown", and nothing is then claimed.

use std::collections::HashMap;

use crate::symbolic::Limit as Budget;
use crate::symbolic::{Expr, Function, Node, Pool, Rational, Sign, Symbol};

/// A limit in the extended reals.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Limit {
    /// Minus infinity.
    MinusInfinity,
    /// Plus infinity.
    PlusInfinity,
    /// Infinite in absolute value, sign not known.
    Infinity,
    /// This value.
    Value(Expr),
    /// The rules do not say.
    Unknown,
}

impl Limit {
    /// Whether the limit is infinite, of either sign.
    pub fn is_infinite(self) -> bool {
        matches!(
            self,
            Self::MinusInfinity | Self::PlusInfinity | Self::Infinity
        )
    }

    fn negated(self) -> Self {
        match self {
            Self::MinusInfinity => Self::PlusInfinity,
            Self::PlusInfinity => Self::MinusInfinity,
            other => other,
        }
    }
}

/// The limit of `e` as `x` goes to `end` from inside its range.
pub fn limit(pool: &Pool, e: Expr, x: Symbol, end: Limit) -> Limit {
    let mut rules = Rules {
        pool,
        x,
        end,
        known: HashMap::new(),
        level: 0,
    };
    rules.limit(e)
}

/// The rules, with the parts that have been looked at: a shared part is looked at once.
struct Rules<'a> {
    pool: &'a Pool,
    x: Symbol,
    end: Limit,
    known: HashMap<Expr, Limit>,
    level: u64,
}

impl Rules<'_> {
    fn limit(&mut self, e: Expr) -> Limit {
        if let Some(&known) = self.known.get(&e) {
            return known;
        }
        if self.level == Budget::Asymptotics.amount() {
            self.pool.exceed(Budget::Asymptotics);
            return Limit::Unknown;
        }
        self.level += 1;
        let found = self.node(e);
        self.level -= 1;
        self.known.insert(e, found);
        found
    }

    fn node(&mut self, e: Expr) -> Limit {
        let pool = self.pool;
        if !pool.depends_on(e, self.x) {
            return Limit::Value(e);
        }
        match &*pool.node(e) {
            Node::Symbol(_) => self.end,
            Node::Sum(terms) => sum(pool, terms.iter().map(|&term| self.limit(term))),
            Node::Product(factors) => {
                product(pool, factors.iter().map(|&factor| self.limit(factor)))
            }
            Node::Power(base, exponent) => self.power(*base, *exponent),
            Node::Call(function, arguments) if arguments.len() == 1 => {
                call(pool, *function, self.limit(arguments[0]))
            }
            _ => Limit::Unknown,
        }
    }

    fn power(&mut self, base: Expr, exponent: Expr) -> Limit {
        let pool = self.pool;
        if pool.depends_on(exponent, self.x) {
            return Limit::Unknown;
        }
        let rises = match pool.sign(exponent) {
            Sign::Positive => true,
            Sign::Negative => false,
            _ => return Limit::Unknown,
        };
        match (self.limit(base), rises) {
            (Limit::PlusInfinity, true) => Limit::PlusInfinity,
            (Limit::MinusInfinity | Limit::Infinity, true) => Limit::Infinity,
            (Limit::PlusInfinity | Limit::MinusInfinity | Limit::Infinity, false) => {
                Limit::Value(pool.zero())
            }
            (Limit::Value(value), true) if pool.is_zero_literal(value) => Limit::Value(value),
            (Limit::Value(value), true) => Limit::Value(pool.pow(value, exponent)),
            (Limit::Value(value), false) => match pool.sign(value) {
                Sign::Zero => reciprocal_of_zero(pool, base),
                Sign::Positive | Sign::Negative => Limit::Value(pool.pow(value, exponent)),
                _ => Limit::Unknown,
            },
            (Limit::Unknown, _) => Limit::Unknown,
        }
    }
}

fn sum(pool: &Pool, terms: impl Iterator<Item = Limit>) -> Limit {
    let mut finite = Vec::new();
    let mut infinite = None;
    for term in terms {
        match (term, infinite) {
            (Limit::Value(value), _) => finite.push(value),
            (Limit::MinusInfinity | Limit::PlusInfinity, None) => infinite = Some(term),
            (Limit::Infinity, None) if finite.is_empty() => infinite = Some(term),
            (_, Some(seen)) if seen == term && term != Limit::Infinity => {}
            _ => return Limit::Unknown,
        }
    }
    infinite.unwrap_or_else(|| Limit::Value(pool.simplify(pool.sum(finite))))
}

fn product(pool: &Pool, factors: impl Iterator<Item = Limit>) -> Limit {
    let mut finite = Vec::new();
    let mut infinite: Option<Limit> = None;
    for factor in factors {
        match factor {
            Limit::Value(value) => finite.push(value),
            Limit::Unknown => return Limit::Unknown,
            Limit::PlusInfinity => infinite = Some(infinite.unwrap_or(Limit::PlusInfinity)),
            Limit::MinusInfinity => {
                infinite = Some(infinite.unwrap_or(Limit::PlusInfinity).negated());
            }
            Limit::Infinity => infinite = Some(Limit::Infinity),
        }
    }
    let value = pool.simplify(pool.product(finite));
    let Some(infinite) = infinite else {
        return Limit::Value(value);
    };
    match pool.sign(value) {
        Sign::Positive => infinite,
        Sign::Negative => infinite.negated(),
        _ => Limit::Unknown,
    }
}

/// A negative power of a base that goes to zero.
fn reciprocal_of_zero(pool: &Pool, base: Expr) -> Limit {
    match pool.sign(base) {
        Sign::Positive | Sign::NonNegative => Limit::PlusInfinity,
        _ => Limit::Infinity,
    }
}

/// The limit of a function of one argument, given the argument's.
fn call(pool: &Pool, function: Function, argument: Limit) -> Limit {
    use Function::{
        Acosh, Asinh, Atanh, Cbrt, Erf, Exp, Log, NormalCdf, NormalPdf, NormalQuantile, Sinh, Tanh,
    };
    let number = |n: i64| Limit::Value(pool.int(n));
    match (function, argument) {
        (Exp, Limit::MinusInfinity) | (NormalCdf, Limit::MinusInfinity) => number(0),
        (NormalPdf, Limit::MinusInfinity | Limit::PlusInfinity) => number(0),
        (Exp | Log | Sinh | Asinh | Acosh | Cbrt, Limit::PlusInfinity) => Limit::PlusInfinity,
        // The argument of a logarithm is positive inside the domain, so this is the way it went.
        (Log, Limit::Infinity) => Limit::PlusInfinity,
        (Sinh | Asinh | Cbrt, Limit::MinusInfinity) => Limit::MinusInfinity,
        (NormalCdf | Tanh | Erf, Limit::PlusInfinity) => number(1),
        (Tanh | Erf, Limit::MinusInfinity) => number(-1),
        (Log, Limit::Value(value)) if is(pool, value, 0) => Limit::MinusInfinity,
        (NormalQuantile, Limit::Value(value)) if is(pool, value, 0) => Limit::MinusInfinity,
        (NormalQuantile | Atanh, Limit::Value(value)) if is(pool, value, 1) => Limit::PlusInfinity,
        (Atanh, Limit::Value(value)) if is(pool, value, -1) => Limit::MinusInfinity,
        (Log | NormalQuantile | Atanh | Acosh, Limit::Value(value))
            if !inside(pool, function, value) =>
        {
            Limit::Unknown
        }
        (_, Limit::Value(value)) if function.is_smooth() => {
            Limit::Value(pool.call(function, &[value]))
        }
        _ => Limit::Unknown,
    }
}

/// Whether a value is certainly inside the open domain of a function with a bounded one.
fn inside(pool: &Pool, function: Function, value: Expr) -> bool {
    let above = |n: i64| pool.sign(pool.sub(value, pool.int(n))).is_positive();
    let below = |n: i64| pool.sign(pool.sub(pool.int(n), value)).is_positive();
    match function {
        Function::Log => above(0),
        Function::NormalQuantile => above(0) && below(1),
        Function::Atanh => above(-1) && below(1),
        _ => above(1),
    }
}

fn is(pool: &Pool, value: Expr, n: i64) -> bool {
    pool.as_number(value) == Some(Rational::from(n))
}
