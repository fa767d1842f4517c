//! What the constructors fold, what is known of a formula when it is made, and the order of its parts.

use super::parse;
use crate::symbolic::{Bound, Function, Interval, Pool, Sign, SymbolKind};

/// What needs no algebra is folded, and nothing that would change where a formula has a value.
#[test]
fn constructors_fold_what_is_exact() {
    let p = super::pool();
    for (given, folded) in [
        ("exp(0)", "1"),
        ("cos(0)", "1"),
        ("cosh(0)", "1"),
        (
            "sin(0) + tan(0) + asin(0) + atan(0) + sinh(0) + tanh(0) + asinh(0) + atanh(0) + erf(0)",
            "0",
        ),
        ("normal_cdf(0)", "1/2"),
        ("log(1)", "0"),
        ("abs(-3)", "3"),
        ("sign(-3)", "-1"),
        ("cbrt(-27/8)", "-1.5"),
        ("cbrt(2)", "cbrt(2)"),
        ("max(2, 3)", "3"),
        ("min(2, 3)", "2"),
        ("max(3, 2)", "3"),
        ("min(3, 2)", "2"),
        ("max(x, x)", "x"),
        ("exp(log(x))", "x"),
        ("log(exp(x))", "x"),
        ("normal_cdf(normal_quantile(u))", "u"),
        ("normal_quantile(normal_cdf(x))", "x"),
        ("abs(abs(x))", "abs(x)"),
        ("abs(exp(x))", "exp(x)"),
        ("8^(1/3)", "2"),
        ("(4/9)^(-3/2)", "27/8"),
        ("2^(1/2)", "sqrt(2)"),
        ("(x^2)^3", "x^6"),
        ("(2*x*y)^2", "4*x^2*y^2"),
        ("x - (y - x)", "2*x - y"),
        ("x*(1/x)", "1"),
    ] {
        assert_eq!(parse(&p, given), parse(&p, folded), "{given}");
    }
    // Neither is a number to a symbol, nor an undefined product, taken for zero or one.
    let (zero, x) = (p.zero(), parse(&p, "x"));
    let undefined = p.div(p.one(), zero);
    assert_eq!(p.mul(zero, undefined), undefined);
    assert_eq!(p.mul(zero, x), zero);
    assert_eq!(p.pow(p.one(), x), p.one());
    assert_eq!(p.pow(x, zero), p.one());
}

#[test]
fn the_structure_of_a_formula() {
    let p = super::pool();
    let ask = |text: &str| parse(&p, text);
    for (text, depth, size) in [
        ("x", 0, 1),
        ("3", 0, 1),
        ("x + 1", 1, 3),
        ("sin(x + 1)^2", 3, 6),
        ("sin(x)*exp(sin(x) + y)", 4, 6),
    ] {
        assert_eq!(p.depth(ask(text)), depth, "{text}");
        assert_eq!(p.size(ask(text)), size, "{text}");
    }
    for (text, kink) in [
        ("x^2 + exp(abs(y))", Some(Function::Abs)),
        ("max(x, y)", Some(Function::Max)),
        ("sign(x)*y", Some(Function::Sign)),
        ("1 + min(x, 2)", Some(Function::Min)),
        ("cbrt(x)*sqrt(y)", None),
    ] {
        assert_eq!(p.has_kink(ask(text)), kink, "{text}");
    }
    let kinds = |text: &str| {
        [SymbolKind::Parameter, SymbolKind::Time, SymbolKind::State]
            .map(|kind| p.depends_on_kind(ask(text), kind))
    };
    assert_eq!(kinds("a + p"), [true, false, false]);
    assert_eq!(kinds("a*t"), [true, true, false]);
    assert_eq!(kinds("exp(x)*a"), [true, false, true]);
    assert_eq!(kinds("3"), [false, false, false]);
    let x = p.find_symbol("x").expect("x");
    assert!(p.depends_on(ask("y + sin(x*a)"), x) && !p.depends_on(ask("y*a"), x));
    assert_eq!(p.symbols_of(ask("x*y + a*b - c")).len(), 5);
    for function in Function::ALL {
        assert_eq!(Function::from_name(function.name()), Some(function));
    }
}

/// The order of terms and factors is that of the formulas, not of their making.
#[test]
fn the_order_does_not_depend_on_what_was_made_first() {
    let factors = [
        "2^a",
        "pi^a",
        "a^b",
        "(a^b)^c",
        "(a*b)^c",
        "(a + b)^c",
        "log(a)^b",
        "exp(a)",
        "x",
        "y^2",
        "sin(x)",
        "cos(x)",
        "sin(y)",
        "sqrt(x + y)",
        "(x + y + 1)",
        "(x + 2*y)",
        "(x*y)^a",
        "(3*x)^a",
        "x^a",
        "x^b",
        "t",
    ];
    let print = |separator: &str, list: &[&str]| {
        let p = super::pool();
        // Made in this order first.
        list.iter().for_each(|text| {
            parse(&p, text);
        });
        p.format(parse(&p, &list.join(separator)))
    };
    for separator in ["*", " + "] {
        let expected = print(separator, &factors);
        for turn in 1..factors.len() {
            let mut list = factors;
            list.rotate_left(turn);
            assert_eq!(print(separator, &list), expected);
            list.reverse();
            assert_eq!(print(separator, &list), expected);
        }
    }
}

/// What was known under other ranges is forgotten.
#[test]
fn a_range_stated_later_counts() {
    let p = Pool::new();
    let x = p.symbol("x", SymbolKind::State);
    let root = p.sqrt(p.square(p.var(x)));
    assert_eq!(p.sign(p.var(x)), Sign::Unknown);
    assert_eq!(p.simplify(root), root);
    let lower = Bound::Open(p.zero());
    let positive = Interval {
        lower,
        upper: Bound::Infinite,
    };
    p.set_range(x, positive);
    assert_eq!(p.sign(p.var(x)), Sign::Positive);
    assert_eq!(p.simplify(root), p.var(x));
    assert_eq!(p.range(x), positive);
    p.set_range(x, Interval::REAL);
    assert_eq!(p.simplify(root), root);
}
