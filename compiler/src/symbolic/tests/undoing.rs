//! Proofs by undoing a function: what follows from the branch is proved, what holds on another branch
//! only is not.

use super::parse;
use crate::symbolic::{Bound, Interval, Pool, SymbolKind};

/// A pool in which `v` lies in a closed interval, `p` is positive, `w` negative, and `x`, `y` are free.
fn pool_with(lower: &str, upper: &str) -> Pool {
    let pool = Pool::new();
    let zero = pool.zero();
    for (name, lower, upper) in [
        ("p", Bound::Open(zero), Bound::Infinite),
        ("q", Bound::Open(zero), Bound::Infinite),
        ("w", Bound::Infinite, Bound::Open(zero)),
        ("x", Bound::Infinite, Bound::Infinite),
        ("y", Bound::Infinite, Bound::Infinite),
        (
            "v",
            Bound::Closed(parse(&pool, lower)),
            Bound::Closed(parse(&pool, upper)),
        ),
    ] {
        let symbol = pool.symbol(name, SymbolKind::Parameter);
        pool.set_range(symbol, Interval { lower, upper });
    }
    pool
}

fn undoes(pool: &Pool, left: &str, right: &str) -> bool {
    pool.equal_by_undoing(parse(pool, left), parse(pool, right))
}

#[test]
fn functions_that_have_one_inverse_are_undone() {
    let pool = pool_with("-1", "1");
    let mut wrong = Vec::new();
    for (left, right) in [
        ("log(p*q + p)", "log(p) + log(q + 1)"),
        ("exp(x + log(p))", "p*exp(x)"),
        ("2*exp(x + log(p)) + y", "2*p*exp(x) + y"),
        ("x*asinh(sinh(y))", "x*y"),
        ("sinh(asinh(x))", "x"),
        ("atanh(tanh(x))", "x"),
        ("tanh(atanh(v/2))", "v/2"),
        ("cbrt(x^3)", "x"),
        ("cbrt(8*x^3)", "2*x"),
        ("asin(x)", "-asin(-x)"),
        ("atan(x)", "-atan(-x)"),
        ("acosh(cosh(p))", "p"),
        ("sqrt(p^2 + 2*p + 1)", "p + 1"),
        ("1/sqrt(p^2 + 2*p + 1)", "1/(p + 1)"),
        ("sqrt(w^2)", "-w"),
        ("normal_quantile((1 + erf(x/sqrt(2)))/2)", "x"),
        ("normal_cdf(x)", "(1 + erf(x/sqrt(2)))/2"),
        ("erf(normal_quantile((2 + v)/4)/sqrt(2))", "v/2"),
        ("erf(normal_quantile(1/2 + v/8)*sqrt(1/2))", "v/4"),
        // A kink elsewhere does no harm to a term with a number before it.
        ("2*atanh(tanh(x)) + abs(y)", "2*x + abs(y)"),
        // Two functions, one inside of the other.
        ("asinh(atanh(tanh(sinh(x))))", "x"),
    ] {
        if !undoes(&pool, left, right) || !undoes(&pool, right, left) {
            wrong.push(format!("{left} = {right} is not proved"));
        }
    }
    for (left, right) in [
        ("log(p*q + p)", "log(p) + log(q + 2)"),
        ("exp(x + log(p))", "p*exp(2*x)"),
        ("exp(x)", "-exp(-x)"),
        ("x + exp(y)", "x - exp(y)"),
        ("sinh(asinh(x))", "2*x"),
        ("acosh(cosh(x))", "x"),
        ("acosh(cosh(w))", "w"),
        ("sqrt(x^2 + 2*x + 1)", "x + 1"),
        ("1/sqrt(x^2 + 2*x + 1)", "1/(x + 1)"),
        ("sqrt(w^2 + 2*w + 1)", "w + 1"),
        ("asin(sin(x))", "x"),
        ("atan(tan(x))", "x"),
        ("acos(cos(x))", "x"),
        // Where the sign of y jumps the other factor counts.
        ("sign(y)*atanh(x)", "sign(y)*atanh(x + 1)"),
    ] {
        if undoes(&pool, left, right) || undoes(&pool, right, left) {
            wrong.push(format!("{left} = {right} is proved"));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// `asin(sin(v)) = v` from -pi/2 to pi/2, and likewise; one end beyond that is too much.
#[test]
fn circular_functions_are_undone_on_their_branch() {
    for (outer, inner, lower, upper, holds) in [
        ("asin", "sin", "-pi/2", "pi/2", true),
        ("asin", "sin", "0", "3/2", true),
        ("asin", "sin", "-3/2", "0", true),
        ("asin", "sin", "0", "2", false),
        ("asin", "sin", "-2", "0", false),
        ("asin", "sin", "-1", "pi", false),
        ("atan", "tan", "-3/2", "3/2", true),
        ("atan", "tan", "0", "2", false),
        ("atan", "tan", "-2", "0", false),
        ("acos", "cos", "0", "pi", true),
        ("acos", "cos", "0", "3", true),
        ("acos", "cos", "-1", "1", false),
        ("acos", "cos", "0", "4", false),
        ("acos", "cos", "2", "4", false),
    ] {
        let pool = pool_with(lower, upper);
        let left = format!("{outer}({inner}(v))");
        assert_eq!(
            undoes(&pool, &left, "v"),
            holds,
            "{left} from {lower} to {upper}"
        );
    }
}
