//! Leading terms: how a formula behaves as an auxiliary symbol goes to zero from above.

use std::collections::{BTreeMap, HashMap};

use crate::symbolic::{Bound, Expr, Function, Limit, Node, Pool, Rational, Symbol, SymbolKind};

/// The leading term of a formula.
#[derive(Clone, Debug, PartialEq)]
pub enum Leading {
    /// The formula is zero.
    Zero,
    /// `coefficient * xi^exponent`, the coefficient not zero for generic values of its symbols.
    Term {
        /// Free of xi.
        coefficient: Expr,
        /// A rational exponent.
        exponent: Rational,
    },
    /// The rules do not say: logarithms, exponentials of large arguments, cancellation.
    Unknown,
}

/// An end of the domain of a symbol.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Side {
    /// The lower end.
    Lower,
    /// The upper end.
    Upper,
}

/// The distance from an end: goes to zero from above.
fn distance(pool: &Pool) -> Symbol {
    pool.symbol("xi (distance from the end)", SymbolKind::Auxiliary)
}

/// The leading term of `e` in the distance `xi` of `x` from an end: `x = end + xi`, `x = end - xi`,
/// and for an infinite end `x = 1/xi` or `-1/xi`.
pub fn at_end(pool: &Pool, e: Expr, x: Symbol, end: Bound, side: Side) -> Leading {
    let symbol = distance(pool);
    let zero = Bound::Open(pool.zero());
    pool.set_range(
        symbol,
        crate::symbolic::Interval {
            lower: zero,
            upper: Bound::Infinite,
        },
    );
    let xi = pool.var(symbol);
    let place = match (end.value(), side) {
        (Some(end), Side::Lower) => pool.add(end, xi),
        (Some(end), Side::Upper) => pool.sub(end, xi),
        (None, Side::Lower) => pool.neg(pool.div(pool.one(), xi)),
        (None, Side::Upper) => pool.div(pool.one(), xi),
    };
    let near = pool.substitute(e, &BTreeMap::from([(x, place)]));
    let mut rules = Rules {
        pool,
        xi: symbol,
        known: HashMap::new(),
        level: 0,
    };
    if pool.is_heavy(near) {
        pool.exceed(Limit::Asymptotics);
        return rules.leading(near);
    }
    match rules.leading(pool.simplify(near)) {
        Leading::Unknown => rules.leading(pool.expand(near)),
        known => known,
    }
}

/// The rules, with the parts that have been looked at: a shared part is looked at once.
struct Rules<'a> {
    pool: &'a Pool,
    xi: Symbol,
    known: HashMap<Expr, Leading>,
    level: u64,
}

impl Rules<'_> {
    fn leading(&mut self, e: Expr) -> Leading {
        if let Some(known) = self.known.get(&e) {
            return known.clone();
        }
        if self.level == Limit::Asymptotics.amount() {
            self.pool.exceed(Limit::Asymptotics);
            return Leading::Unknown;
        }
        self.level += 1;
        let found = self.node(e);
        self.level -= 1;
        self.known.insert(e, found.clone());
        found
    }

    fn node(&mut self, e: Expr) -> Leading {
        let pool = self.pool;
        if !pool.depends_on(e, self.xi) {
            return constant(pool, e);
        }
        match &*pool.node(e) {
            Node::Symbol(_) => Leading::Term {
                coefficient: pool.one(),
                exponent: Rational::ONE,
            },
            Node::Product(factors) => self.product(factors),
            Node::Sum(terms) => self.sum(terms),
            Node::Power(base, exponent) => self.power(*base, *exponent),
            Node::Call(function, arguments) if arguments.len() == 1 => {
                call(pool, *function, self.leading(arguments[0]))
            }
            _ => Leading::Unknown,
        }
    }

    fn product(&mut self, factors: &[Expr]) -> Leading {
        let pool = self.pool;
        let mut coefficients = Vec::new();
        let mut total = Rational::ZERO;
        for &factor in factors {
            match self.leading(factor) {
                Leading::Term {
                    coefficient,
                    exponent,
                } => {
                    coefficients.push(coefficient);
                    total += exponent;
                }
                other => return other,
            }
        }
        Leading::Term {
            coefficient: pool.simplify(pool.product(coefficients)),
            exponent: total,
        }
    }

    fn sum(&mut self, terms: &[Expr]) -> Leading {
        let pool = self.pool;
        let mut lowest: Option<(Rational, Vec<Expr>)> = None;
        for &term in terms {
            let (coefficient, exponent) = match self.leading(term) {
                Leading::Term {
                    coefficient,
                    exponent,
                } => (coefficient, exponent),
                Leading::Zero => continue,
                Leading::Unknown => return Leading::Unknown,
            };
            match &mut lowest {
                Some((least, all)) if exponent == *least => all.push(coefficient),
                Some((least, _)) if exponent > *least => {}
                _ => lowest = Some((exponent, vec![coefficient])),
            }
        }
        let Some((exponent, coefficients)) = lowest else {
            return Leading::Zero;
        };
        let coefficient = pool.simplify(pool.sum(coefficients));
        if pool.is_zero(coefficient).is_no() {
            Leading::Term {
                coefficient,
                exponent,
            }
        } else {
            // The leading terms cancel: the next ones were dropped on the way.
            Leading::Unknown
        }
    }

    fn power(&mut self, base: Expr, exponent: Expr) -> Leading {
        let pool = self.pool;
        let Some(power) = pool.as_number(exponent) else {
            return Leading::Unknown;
        };
        match self.leading(base) {
            Leading::Term {
                coefficient,
                exponent: inner,
            } if power.is_int() || pool.sign(coefficient).is_non_negative() => Leading::Term {
                coefficient: pool.pow(coefficient, exponent),
                exponent: inner * power,
            },
            Leading::Zero if power > Rational::ZERO => Leading::Zero,
            _ => Leading::Unknown,
        }
    }
}

fn constant(pool: &Pool, e: Expr) -> Leading {
    if pool.is_zero(e).is_yes() {
        Leading::Zero
    } else {
        Leading::Term {
            coefficient: e,
            exponent: Rational::ZERO,
        }
    }
}

fn call(pool: &Pool, function: Function, argument: Leading) -> Leading {
    use Function::{Asin, Asinh, Atan, Atanh, Sin, Sinh, Tan, Tanh};
    if !function.is_smooth() {
        return Leading::Unknown;
    }
    let value = match &argument {
        Leading::Zero => pool.zero(),
        Leading::Term { exponent, .. } if *exponent > Rational::ZERO => pool.zero(),
        Leading::Term {
            coefficient,
            exponent,
        } if *exponent == Rational::ZERO => *coefficient,
        _ => return Leading::Unknown,
    };
    if pool.is_zero_literal(value) {
        match function {
            // f(y) = y + o(y)
            Sin | Tan | Asin | Atan | Sinh | Tanh | Asinh | Atanh => return argument,
            Function::Exp | Function::Cos | Function::Cosh => {}
            _ => return Leading::Unknown,
        }
    }
    let image = pool.call(function, &[value]);
    if pool.is_zero(image).is_no() {
        Leading::Term {
            coefficient: image,
            exponent: Rational::ZERO,
        }
    } else {
        Leading::Unknown
    }
}
