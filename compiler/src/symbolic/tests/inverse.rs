//! Inverse functions and polynomial coefficients.

use super::{parse, pool};
use crate::symbolic::{Bound, Interval, Pool, SymbolKind};

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
x: 1/x => 1/h
w: 1/w^2 => -1/sqrt(h)
w: w^4 => -h^(1/4)
S: S^4 => h^(1/4)
x: cbrt(x) => h^3
x: 3^x => log(h)/log(3)
x: atan(x) => tan(h)
u: acos(u) => cos(h)
S: cosh(S) => acosh(h)
x: erf(x) => normal_quantile((h + 1)/2)/sqrt(2)
u: u^2 - 2*u => 1 - sqrt(h + 1)
S: 2*S^2 + S => (sqrt(8*h + 1) - 1)/4
S: S^2/2 + S + 5 => sqrt(2*h - 9) - 1
S: 1/(S^2 + S) => (sqrt(4/h + 1) - 1)/2
x: (2*x + 1)/(3*x + 4) => (4*h - 1)/(2 - 3*h)
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
        "x: cosh(x) => none",
        "x: x^4 => none",
        "x: 1/x^2 => none",
        "x: x^3 - x => none",
        "x: tan(x) => none",
        "x: cos(x) => none",
    ] {
        let (found, expected) = solved(&pool, line);
        assert_eq!(found, expected, "{line}");
    }
}

/// A circular function has an inverse on its principal interval (Abramowitz and Stegun 1964, 4.4.4-4.4.6),
/// none on a longer one or another.
#[test]
fn circular_functions_are_inverted_on_their_principal_interval() {
    for (forward, lower, upper, expected) in [
        ("sin(x)", "-pi/2", "pi/2", "asin(h)"),
        ("sin(x)", "0", "3/2", "asin(h)"),
        ("sin(2*x)", "-pi/4", "pi/4", "asin(h)/2"),
        ("sin(x)", "0", "pi", "none"),
        ("sin(x)", "-pi", "0", "none"),
        ("sin(x)", "0", "2", "none"),
        ("sin(x)", "-2", "0", "none"),
        ("sin(x)", "pi/2", "pi", "none"),
        ("cos(x)", "0", "pi", "acos(h)"),
        ("cos(x)", "1", "3", "acos(h)"),
        ("cos(x)", "-1", "1", "none"),
        ("cos(x)", "0", "4", "none"),
        ("cos(x)", "-3", "-1", "none"),
        ("tan(x)", "-pi/2", "pi/2", "atan(h)"),
        ("tan(x)", "-1", "3/2", "atan(h)"),
        ("tan(x)", "0", "2", "none"),
        ("tan(x)", "-2", "0", "none"),
    ] {
        let pool = Pool::new();
        let x = pool.symbol("x", SymbolKind::State);
        let bounds = [lower, upper].map(|text| Bound::Open(parse(&pool, text)));
        let [lower, upper] = bounds;
        pool.set_range(x, Interval { lower, upper });
        let (found, _) = solved(&pool, &format!("x: {forward} => "));
        assert_eq!(
            found,
            expected,
            "{forward} on {:?}",
            bounds.map(|b| b.value().map(|e| pool.format(e)))
        );
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
