//! Inverse functions and polynomial coefficients.

use super::{parse, pool};
use crate::symbolic::{Pool, SymbolKind};

/// `forward => inverse` in the auxiliary symbol `h`, for the unknown named first.
const INVERSES: &str = "
x: 2*x + a => (h - a)/2
S: log(S) => exp(h)
S: sqrt(S) => h^2
S: 2*sqrt(S)/sigma => sigma^2*h^2/4
S: 1/S => 1/h
S: S^(2 - 2*p) => h^(1/(2 - 2*p))
u: log(u/(1 - u)) => exp(h)/(exp(h) + 1)
u: u/(1 - u) => h/(h + 1)
u: asin(2*u - 1) => (sin(h) + 1)/2
x: asinh(a*x) => sinh(h)/a
x: sinh(x) => asinh(h)
x: x^3 => cbrt(h)
u: normal_quantile(u) => normal_cdf(h)
x: exp(2*x) + 1 => log(h - 1)/2
w: w^2 => -sqrt(h)
S: S^2 + S => (sqrt(4*h + 1) - 1)/2
u: atanh(u) => tanh(h)
S: S - 1/S => (h + sqrt(h^2 + 4))/2
";

fn solved(pool: &Pool, line: &str) -> (String, String) {
    let (name, rest) = line.split_once(": ").expect("a name");
    let (forward, inverse) = rest.split_once(" => ").expect("a pair");
    let unknown = pool.find_symbol(name).expect("a symbol");
    let h = pool.symbol("h", SymbolKind::Auxiliary);
    let found = pool.invert(parse(pool, forward), unknown, h);
    (
        found.map_or("none".into(), |e| pool.format(e)),
        inverse.into(),
    )
}

#[test]
fn inverse_functions() {
    let pool = pool();
    let lines = INVERSES.lines().filter(|line| !line.is_empty());
    let failures: Vec<String> = lines
        .filter_map(|line| {
            let (found, expected) = solved(&pool, line);
            (found != expected).then(|| format!("{line}: {found}"))
        })
        .collect();
    assert!(failures.is_empty(), "{}", failures.join("\n"));
}

#[test]
fn what_is_not_one_to_one_has_no_inverse() {
    let pool = pool();
    for line in [
        "x: x^2 => none",
        "x: sin(x) => none",
        "x: x + exp(x) => none",
        "x: x^2 + x => none",
        "x: abs(x) => none",
    ] {
        let (found, expected) = solved(&pool, line);
        assert_eq!(found, expected, "{line}");
    }
}

#[test]
fn polynomial_coefficients() {
    let pool = pool();
    let symbols = ["x", "y"].map(|name| pool.find_symbol(name).expect("a symbol"));
    let e = parse(&pool, "(x + a*y)^2 + (x^3 - x)/(x + 1) + exp(a)/p");
    let found = pool.polynomial_in(e, &symbols).expect("a polynomial");
    let text: Vec<String> = found
        .iter()
        .map(|(k, c)| format!("{k:?} {}", pool.format(*c)))
        .collect();
    assert_eq!(
        text,
        [
            "[0, 0] exp(a)/p",
            "[0, 2] a^2",
            "[1, 0] -1",
            "[1, 1] 2*a",
            "[2, 0] 2"
        ]
    );
    for text in ["sqrt(x)", "1/x", "exp(x)*y", "x^a", "1/(x + a)", "abs(y)"] {
        assert_eq!(
            pool.polynomial_in(parse(&pool, text), &symbols),
            None,
            "{text}"
        );
    }
}
