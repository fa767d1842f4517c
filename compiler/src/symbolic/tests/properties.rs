//! Properties of random formulas.

use std::collections::BTreeMap;

use proptest::prelude::*;
use proptest::test_runner::RngSeed;

use super::{parse, pool};
use crate::symbolic::{Expr, Pool, Sign, Symbol, Truth};

/// A random formula as text in the language.
fn formula() -> impl Strategy<Value = String> {
    let leaf = prop_oneof![
        Just("x".to_string()),
        Just("y".to_string()),
        Just("p".to_string()),
        Just("u".to_string()),
        Just("pi".to_string()),
        (1..20i32).prop_map(|n| n.to_string()),
        (1..99i32).prop_map(|n| format!("0.{n:02}")),
    ];
    leaf.prop_recursive(4, 24, 3, |inner| {
        let unary = prop_oneof![
            Just("exp"),
            Just("log"),
            Just("sqrt"),
            Just("sin"),
            Just("cos"),
            Just("tanh"),
            Just("atan"),
            Just("normal_cdf"),
            Just("sinh"),
            Just("cbrt"),
            Just("abs"),
            Just("erf"),
        ];
        prop_oneof![
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a} + {b})")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a} - {b})")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a})*({b})")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a})/({b})")),
            (inner.clone(), -3..4i32).prop_map(|(a, n)| format!("({a})^({n})")),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| format!("({a})^({b})")),
            (unary, inner.clone()).prop_map(|(f, a)| format!("{f}({a})")),
            inner.prop_map(|a| format!("-({a})")),
        ]
    })
}

fn point(pool: &Pool, shift: f64) -> BTreeMap<Symbol, f64> {
    let values = [("x", 0.7), ("y", -1.3), ("p", 1.9), ("u", 0.4)];
    values
        .into_iter()
        .map(|(name, v)| (pool.find_symbol(name).expect("a symbol"), v + shift * 0.01))
        .collect()
}

fn big(values: &BTreeMap<Symbol, f64>) -> BTreeMap<Symbol, crate::symbolic::Big> {
    values
        .iter()
        .map(|(&s, &v)| {
            (
                s,
                crate::symbolic::Big::try_from(v)
                    .expect("finite")
                    .with_precision(256)
                    .value(),
            )
        })
        .collect()
}

/// The values of two formulas that should be equal, where both exist, and whether they are close.
fn close_at(pool: &Pool, a: Expr, b: Expr, values: &BTreeMap<Symbol, f64>) -> Result<(), String> {
    let values = big(values);
    let (Some(a), Some(b)) = (pool.eval_big(a, &values), pool.eval_big(b, &values)) else {
        return Ok(());
    };
    let (x, y) = (a.to_f64().value(), b.to_f64().value());
    let gap = (a - b).to_f64().value().abs();
    if gap <= 1e-25 * x.abs().max(y.abs()).max(1e-25) {
        Ok(())
    } else {
        Err(format!("{x} and {y}"))
    }
}

proptest! {
    #![proptest_config(ProptestConfig {
        cases: 300,
        rng_seed: RngSeed::Fixed(1),
        failure_persistence: None,
        ..ProptestConfig::default()
    })]

    #[test]
    fn what_is_printed_parses_to_the_same(text in formula()) {
        let pool = pool();
        if let Ok(e) = crate::front::formula::parse_in_pool(&pool, &text) {
            let printed = pool.format(e);
            prop_assert_eq!(parse(&pool, &printed), e, "{}", printed);
        }
    }

    #[test]
    fn simplified_and_expanded_formulas_have_the_same_value(text in formula()) {
        let pool = pool();
        if let Ok(e) = crate::front::formula::parse_in_pool(&pool, &text) {
            for other in [pool.simplify(e), pool.expand(e)] {
                for shift in [0.0, 3.0] {
                    let result = close_at(&pool, e, other, &point(&pool, shift));
                    prop_assert!(result.is_ok(), "{} as {}: {:?}", text, pool.format(other), result);
                }
            }
        }
    }

    /// What is said of a sign holds at every point of the ranges, near their ends and far out too.
    #[test]
    fn signs_hold_wherever_there_is_a_value(
        text in formula(),
        size in -6..7i32,
        (x, y, p, u) in (-2.0..2.0f64, -2.0..2.0f64, 0.1..2.0f64, 0.01..0.99f64),
    ) {
        let pool = pool();
        if let Ok(e) = crate::front::formula::parse_in_pool(&pool, &text) {
            let scale = 10f64.powi(size);
            let near = if size < 0 { u * scale } else { u };
            let values = [("x", x * scale), ("y", y), ("p", p * scale), ("u", near)];
            let values = values
                .into_iter()
                .map(|(name, v)| (pool.find_symbol(name).expect("a symbol"), v))
                .collect();
            if let Some(value) = pool.eval_big(e, &big(&values)) {
                let value = value.to_f64().value();
                let holds = match pool.sign(e) {
                    Sign::Positive => value > 0.0,
                    Sign::NonNegative => value >= 0.0,
                    Sign::Zero => value == 0.0,
                    Sign::NonPositive => value <= 0.0,
                    Sign::Negative => value < 0.0,
                    Sign::Unknown => true,
                };
                prop_assert!(holds || value.abs() < 1e-40, "{}: {:?}, yet {}", text, pool.sign(e), value);
            }
        }
    }

    /// A proof and a refutation of one equation would be a contradiction: the sum of a formula and a
    /// small constant never equals it, the formula and its derivative's primitive do.
    #[test]
    fn a_shift_is_never_proved_away(text in formula()) {
        let pool = pool();
        if let Ok(e) = crate::front::formula::parse_in_pool(&pool, &text) {
            let shifted = pool.add(e, pool.ratio(1, 1_000_000_000));
            prop_assert!(pool.equal(e, e) == Truth::Yes);
            prop_assert!(!pool.equal(shifted, e).is_yes() || pool.eval_big(e, &big(&point(&pool, 0.0))).is_none());
        }
    }

    /// Central difference with step 1e-20 at 256 bits: an error of about 1e-40 beside a rounding error
    /// of about 1e-57.
    #[test]
    fn derivative_agrees_with_differences(text in formula()) {
        let pool = pool();
        let x = pool.find_symbol("x").expect("x");
        if let Ok(e) = crate::front::formula::parse_in_pool(&pool, &text) {
            let values = big(&point(&pool, 0.0));
            let step = crate::symbolic::Big::try_from(1e-20).expect("finite").with_precision(256).value();
            let at = |sign: i32| {
                let mut moved = values.clone();
                let shift = if sign < 0 { -step.clone() } else { step.clone() };
                moved.insert(x, &values[&x] + shift);
                pool.eval_big(e, &moved)
            };
            let slope = pool.eval_big(pool.derivative(e, x), &values);
            if let (Some(above), Some(below), Some(slope)) = (at(1), at(-1), slope) {
                let size = above.to_f64().value().abs().max(1.0);
                let difference = ((above - below) / (&step + &step)).to_f64().value();
                let slope = slope.to_f64().value();
                // Kinks and steep places are not the point here.
                if slope.abs() < 1e6 && size < 1e6 {
                    prop_assert!((difference - slope).abs() <= 1e-9 * slope.abs().max(1.0), "{}: {} and {}", text, slope, difference);
                }
            }
        }
    }
}
