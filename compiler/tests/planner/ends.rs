//! Limits, leading terms and Feller's test against handbook results.

use driftwright::analysis::asymptotics::{Leading, Side, at_end};
use driftwright::analysis::boundary::{End, classify};
use driftwright::analysis::limits::{Limit, limit};
use driftwright::calculus;
use driftwright::diagnostic::Diagnostics;
use driftwright::front::{self, formula::parse_in_pool};
use driftwright::source::SourceFile;
use driftwright::symbolic::{Bound, Interval, Pool, Rational, Symbol, SymbolKind};

fn on(lower: Option<i64>, upper: Option<i64>) -> (Pool, Symbol) {
    let pool = Pool::new();
    let x = pool.symbol("x", SymbolKind::State);
    let bound = |end: Option<i64>| end.map_or(Bound::Infinite, |n| Bound::Open(pool.int(n)));
    pool.set_range(
        x,
        Interval {
            lower: bound(lower),
            upper: bound(upper),
        },
    );
    (pool, x)
}

#[test]
fn limits_at_the_ends_of_usual_coordinates() {
    let minus = Limit::MinusInfinity;
    let plus = Limit::PlusInfinity;
    for (text, lower, upper, expected) in [
        ("log(x)", Some(0), None, (minus, plus)),
        ("log(x/(1 - x))", Some(0), Some(1), (minus, plus)),
        ("atanh(x)", Some(-1), Some(1), (minus, plus)),
        ("normal_quantile(x)", Some(0), Some(1), (minus, plus)),
        ("asinh(x)", None, None, (minus, plus)),
        ("log(exp(x) - 1)", Some(0), None, (minus, plus)),
        ("-2*log(x) + 3", Some(0), None, (plus, minus)),
    ] {
        let (pool, x) = on(lower, upper);
        let e = parse_in_pool(&pool, text).unwrap();
        let end = |n: Option<i64>, infinite| n.map_or(infinite, |n| Limit::Value(pool.int(n)));
        let found = (
            limit(&pool, e, x, end(lower, minus)),
            limit(&pool, e, x, end(upper, plus)),
        );
        assert_eq!(found, expected, "{text}");
    }
    let (pool, x) = on(Some(0), None);
    for (text, value) in [("sqrt(x)", "0"), ("exp(-x)", "1"), ("tanh(x) + 2", "2")] {
        let e = parse_in_pool(&pool, text).unwrap();
        let at_zero = limit(&pool, e, x, Limit::Value(pool.zero()));
        assert_eq!(
            at_zero,
            Limit::Value(parse_in_pool(&pool, value).unwrap()),
            "{text}"
        );
    }
    // Two infinities of opposite sign decide nothing.
    let difference = parse_in_pool(&pool, "exp(x) - x").unwrap();
    assert_eq!(limit(&pool, difference, x, plus), Limit::Unknown);
}

#[test]
fn leading_terms() {
    let zero = |pool: &Pool| Bound::Open(pool.zero());
    for (text, coefficient, exponent) in [
        ("3*x + x^2", "3", (1, 1)),
        ("2*sqrt(x)*(1 + x)", "2", (1, 2)),
        ("(1 - x)/x", "1", (-1, 1)),
        ("x^(3/4)*exp(-x)", "1", (3, 4)),
        ("sinh(5*x)", "5", (1, 1)),
    ] {
        let (pool, x) = on(Some(0), None);
        let e = parse_in_pool(&pool, text).unwrap();
        let expected = Leading::Term {
            coefficient: parse_in_pool(&pool, coefficient).unwrap(),
            exponent: Rational::from(exponent.0) / Rational::from(exponent.1),
        };
        assert_eq!(
            at_end(&pool, e, x, zero(&pool), Side::Lower),
            expected,
            "{text}"
        );
    }
    let (pool, x) = on(Some(0), None);
    let logarithm = parse_in_pool(&pool, "x*log(x)").unwrap();
    assert_eq!(
        at_end(&pool, logarithm, x, zero(&pool), Side::Lower),
        Leading::Unknown
    );
    let far = parse_in_pool(&pool, "x - 2*x^3").unwrap();
    let Leading::Term { exponent, .. } = at_end(&pool, far, x, Bound::Infinite, Side::Upper) else {
        panic!("a polynomial has a leading term")
    };
    assert_eq!(exponent, Rational::from(-3));
}

/// The lower end at 0 and the upper end of `dX = drift dt + noise dW`.
fn ends(drift: &str, noise: &str, upper: &str) -> (End, End) {
    let text = format!(
        "[model]\nname = \"m\"\ndrivers = [\"W\"]\n[parameters]\ns = {{ value = 1, range = \"(0, inf)\" }}\n\
         [states.x]\ninitial = \"0.5\"\ndrift = \"{drift}\"\ndiffusion = \"{noise}\"\ndomain = \"(0, {upper})\"\n"
    );
    let mut diagnostics = Diagnostics::new();
    let model = front::read(&SourceFile::new("m.toml", text), &mut diagnostics).unwrap();
    diagnostics.finish();
    let dynamics = calculus::dynamics(&model);
    let at = |side| classify(&model, &dynamics, 0, side);
    (at(Side::Lower), at(Side::Upper))
}

/// Squared Bessel processes of dimension d reach 0 if and only if d < 2, Bessel processes likewise
/// (Revuz and Yor 1999, section XI.1); square-root and Jacobi diffusions by Feller's condition (Karlin
/// and Taylor 1981, section 15.6); explosion of dX = X^2 dW + X^3 dt and of dX = (1 + X^2) dt by
/// comparison with 1/(1 - W) and tan t.
#[test]
fn fellers_classification() {
    for (drift, noise, upper, lower_reached, upper_reached) in [
        ("2", "2*sqrt(x)", "inf", false, false),
        ("1.9", "2*sqrt(x)", "inf", true, false),
        ("0", "2*sqrt(x)", "inf", true, false),
        ("1/(2*x)", "1", "inf", false, false),
        ("0.9/(2*x)", "1", "inf", true, false),
        ("x - x^2", "s*x", "inf", false, false),
        ("0.1 - x", "s*x", "inf", false, false),
        ("-0.1 - x", "s*x", "inf", true, false),
        ("0", "s*x^(3/4)", "inf", true, false),
        ("0.3 - x", "sqrt(x*(1 - x))", "1", true, false),
        ("0.5 - x", "sqrt(x*(1 - x))", "1", false, false),
        ("0.5 - x/2", "sqrt(x*(1 - x))", "1", false, true),
        ("s^2*x^3", "s*x^2", "inf", false, true),
        ("1 + x^2", "0", "inf", false, true),
        ("x*(1 - x)", "s*x^(3/2)", "inf", false, false),
    ] {
        let expected = |reached| {
            if reached {
                End::Reached
            } else {
                End::NotReached
            }
        };
        let found = ends(drift, noise, upper);
        assert_eq!(
            found,
            (expected(lower_reached), expected(upper_reached)),
            "{drift} | {noise}"
        );
    }
    assert_eq!(ends("x*log(x)", "s*x", "inf").0, End::Undecided(None));
}
