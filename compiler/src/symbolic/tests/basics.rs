//! Constructors, printing, derivatives, substitution.

use std::collections::BTreeMap;

use super::parse;
use crate::symbolic::{Bound, Function, Interval, Pool, Sign, SymbolKind, Truth};

#[test]
fn equal_structure_is_equal_handle() {
    let p = Pool::new();
    let x = p.var(p.symbol("x", SymbolKind::State));
    let y = p.var(p.symbol("y", SymbolKind::State));
    assert_eq!(p.add(x, y), p.add(y, x));
    assert_eq!(p.mul(x, x), p.square(x));
    assert_eq!(p.sub(x, x), p.zero());
    assert_eq!(p.div(x, x), p.one());
    assert_eq!(p.mul(p.sqrt(x), p.sqrt(x)), x);
    assert_ne!(p.sqrt(p.square(x)), x);
}

#[test]
fn printing_reads_as_written() {
    let p = Pool::new();
    let param = |n: &str| p.var(p.symbol(n, SymbolKind::Parameter));
    let (mu, sigma, kappa, theta) = (param("mu"), param("sigma"), param("kappa"), param("theta"));
    let x = p.var(p.symbol("X", SymbolKind::State));
    let t = p.var(p.symbol("t", SymbolKind::Time));
    let half = p.ratio(1, 2);
    let s2 = p.square(sigma);
    let cases = [
        (p.sub(mu, p.mul(half, s2)), "mu - sigma^2/2"),
        (p.neg(p.mul(half, s2)), "-sigma^2/2"),
        (
            p.product([p.int(2), kappa, p.sub(theta, x)]),
            "2*kappa*(theta - X)",
        ),
        (p.mul(p.add(mu, p.mul(half, s2)), x), "(mu + sigma^2/2)*X"),
        (p.div(p.one(), x), "1/X"),
        (p.sqrt(x), "sqrt(X)"),
        (p.div(p.int(-3), p.mul(x, sigma)), "-3/(sigma*X)"),
        (p.mul(x, p.exp(p.neg(p.mul(mu, t)))), "exp(-mu*t)*X"),
        (p.pow(x, p.ratio(3, 2)), "X^(3/2)"),
        (p.pow(x, p.sub(mu, p.one())), "X^(mu - 1)"),
        (p.pow(p.neg(x), p.int(3)), "-X^3"),
        (p.pow(p.int(-2), mu), "(-2)^mu"),
        (p.sub(x, p.ratio(1, 20)), "X - 0.05"),
        (p.mul(p.ratio(1, 3), x), "X/3"),
        (p.pow(p.exp(x), p.int(2)), "exp(2*X)"),
        (p.pow(p.exp(x), mu), "exp(mu*X)"),
        (p.pow(p.sqrt(x), mu), "sqrt(X)^mu"),
        (p.pow(p.square(x), half), "sqrt(X^2)"),
        (p.sqrt(p.mul(p.int(4), x)), "2*sqrt(X)"),
        (p.pow(p.pow(x, mu), p.int(3)), "X^(3*mu)"),
        (p.pow(p.int(10), p.int(20)), "100000000000000000000"),
        (p.pow(p.ratio(2, 3), p.int(-2)), "9/4"),
        (
            p.sum([p.pow(x, p.int(3)), p.square(x), x, t, mu]),
            "mu + t + X + X^2 + X^3",
        ),
        (p.add(p.div(mu, x), p.square(x)), "mu/X + X^2"),
        (p.sub(p.neg(x), mu), "-mu - X"),
        (p.neg(p.add(x, mu)), "-(mu + X)"),
        (
            p.call(Function::Max, &[p.sub(x, p.int(40)), p.zero()]),
            "max(X - 40, 0)",
        ),
    ];
    for (e, text) in cases {
        assert_eq!(p.format(e), text);
    }
}

/// Neither proved nor refuted, and no budget is to blame.
#[test]
fn what_is_open_exceeds_no_budget() {
    let p = super::pool();
    let (a, b) = (parse(&p, "log(x^2)"), parse(&p, "2*log(x)"));
    assert_eq!(p.equal(a, b), Truth::CannotTell);
    assert!(p.exceeded().is_empty());
    // Beyond what double precision shows, and still seen.
    let near = p.add(a, p.pow(p.int(10), p.int(-25)));
    assert!(p.equal(a, near).is_no());
}

/// Beyond double precision there are no literals: a power stays one, other numbers are put together.
#[test]
fn numbers_too_long_for_a_literal_read_back() {
    let p = super::pool();
    let shown = |text: &str| p.format(super::parse(&p, text));
    assert_eq!(shown("((11)^(-3))^((10)^(2))"), "(1/1331)^100");
    assert_eq!(shown("x*11^300/13^300"), "11^300*x/13^300");
    assert_eq!(shown("7*1e300*1e300"), "(7*1e300*1e300)");
    for text in [
        "((11)^(-3))^((10)^(2))",
        "(11/13)^300",
        "x/1e307/1e307",
        "1e300*1e300*1e300*1e300*1e300*x",
        "1e307*1e307 + 1/3",
        "(1e307 + 7)*(1e307 + 3)*(1e307 + 9)*(1e307 + 11)/(1e307 + 1)",
        "(1e300 + 0.05)*(1e300 + 3)",
        "-1e300*1e300 - x",
        "x^(1e300*1e300 + 1/2)",
    ] {
        let e = super::parse(&p, text);
        for form in [e, p.simplify(e)] {
            let printed = p.format(form);
            assert_eq!(super::parse(&p, &printed), form, "{text} as {printed}");
        }
    }
}

#[test]
fn derivative_of_a_long_sum_is_fast() {
    let p = Pool::new();
    let x = p.symbol("x", SymbolKind::State);
    let terms = (1..=20_000).map(|i| {
        p.mul(
            p.var(p.symbol(&format!("a{i}"), SymbolKind::Parameter)),
            p.var(x),
        )
    });
    let sum = p.sum(terms);
    let slope = p.derivative(sum, x);
    assert_eq!(p.symbols_of(slope).len(), 20_000);
    let at_one = p.substitute(sum, &BTreeMap::from([(x, p.one())]));
    assert_eq!(at_one, slope);
}

#[test]
fn refutation_has_a_witness() {
    let p = Pool::new();
    let x = p.var(p.symbol("x", SymbolKind::State));
    let near = p.mul(x, p.ratio(1_000_000_001, 1_000_000_000));
    let Truth::No(witness) = p.equal(x, near) else {
        panic!("a near miss is refuted")
    };
    assert_eq!(witness.point.len(), 1);
    assert_ne!(witness.left, witness.right);
}

#[test]
fn sign_follows_from_ranges() {
    let p = Pool::new();
    let k = p.symbol("K", SymbolKind::Parameter);
    let x = p.symbol("x", SymbolKind::State);
    p.set_range(
        k,
        Interval {
            lower: Bound::Open(p.zero()),
            upper: Bound::Infinite,
        },
    );
    p.set_range(
        x,
        Interval {
            lower: Bound::Open(p.zero()),
            upper: Bound::Open(p.var(k)),
        },
    );
    assert_eq!(p.sign(p.sub(p.var(k), p.var(x))), Sign::Positive);
    assert_eq!(
        p.sign(p.sub(p.var(x), p.mul(p.int(2), p.var(k)))),
        Sign::Negative
    );
    assert_eq!(p.sign(p.sub(p.var(x), p.one())), Sign::Unknown);
}

#[test]
fn a_formula_without_value_at_an_end_has_no_sign_there() {
    let p = super::pool();
    for text in ["q - a^2/(2*p)", "1 - 1/p", "q + a/p", "1 - 1/(2*u)"] {
        assert_eq!(p.sign(parse(&p, text)), Sign::Unknown, "{text}");
    }
    assert_eq!(p.sign(parse(&p, "1/p - 1 + 1")), Sign::Positive);
    assert_eq!(p.sign(parse(&p, "1 - 1/(1 + p)")), Sign::Positive);
}
