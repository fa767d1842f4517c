//! The grammar, and what the printer prints read back.

use proptest::prelude::*;
use proptest::test_runner::RngSeed;

use super::{MAX_DEPTH, parse, parse_in_pool};
use crate::front::text::MappedText;
use crate::symbolic::{Expr, Function, Pool, SymbolKind};

fn pool() -> Pool {
    let pool = Pool::new();
    pool.symbol("t", SymbolKind::Time);
    for name in ["a", "b", "σ"] {
        pool.symbol(name, SymbolKind::Parameter);
    }
    for name in ["x", "y"] {
        pool.symbol(name, SymbolKind::State);
    }
    pool
}

/// Pairs of formulas that mean the same by the grammar alone.
#[test]
fn precedence_and_association() {
    let pool = pool();
    let same = [
        ("a + b*x", "a + (b*x)"),
        ("a - b - x", "(a - b) - x"),
        ("a/b/x", "(a/b)/x"),
        ("a/b*x", "(a/b)*x"),
        ("-x^2", "-(x^2)"),
        ("2^-x", "2^(-x)"),
        ("a^b^x", "a^(b^x)"),
        ("2^-x^2", "2^(-(x^2))"),
        ("-a*b", "(-a)*b"),
        ("a*-b", "-(a*b)"),
        ("a - -b", "a + b"),
        ("+a", "a"),
        ("0.05*x", "x/20"),
        ("1e-3*x", "x/1000"),
        ("2*σ", "σ + σ"),
        (" a\n+\tb ", "a+b"),
        ("min(a, b)", "min((a), (b))"),
        ("sqrt(x)", "x^(1/2)"),
    ];
    for (left, right) in same {
        let read = |text| parse_in_pool(&pool, text).unwrap_or_else(|e| panic!("{text}: {e:?}"));
        assert_eq!(read(left), read(right), "{left} against {right}");
    }
}

#[test]
fn different_readings_stay_different() {
    let pool = pool();
    let different = [
        ("-x^2", "(-x)^2"),
        ("a^b^x", "(a^b)^x"),
        ("a - b - x", "a - (b - x)"),
        ("a/b/x", "a/(b/x)"),
    ];
    for (left, right) in different {
        assert_ne!(
            parse_in_pool(&pool, left).unwrap(),
            parse_in_pool(&pool, right).unwrap(),
            "{left} against {right}"
        );
    }
}

#[test]
fn spans_cover_each_part() {
    let ast = parse(&MappedText::plain("a + exp(-b*t)", 100)).unwrap();
    let names: Vec<(String, usize, usize)> = ast
        .names()
        .into_iter()
        .map(|(n, s)| (n.to_owned(), s.start, s.end))
        .collect();
    assert_eq!(
        names,
        [
            ("a".into(), 100, 101),
            ("b".into(), 109, 110),
            ("t".into(), 111, 112)
        ]
    );
    assert_eq!((ast.span.start, ast.span.end), (100, 113));
}

#[test]
fn long_sums_are_flat() {
    let pool = pool();
    let terms: Vec<String> = (0..20_000).map(|i| format!("{i}*x^{i}")).collect();
    let sum = parse_in_pool(&pool, &terms.join(" + ")).unwrap();
    assert!(pool.size(sum) > 20_000);
    let product = vec!["a*b/x"; 20_000].join("*");
    assert_eq!(
        pool.format(parse_in_pool(&pool, &product).unwrap()),
        "a^20000*b^20000/x^20000"
    );
}

/// The deepest formulas fit a thread with the default stack of 2 MiB; deeper ones are refused.
#[test]
fn nesting_is_bounded() {
    let nested = |open: &str, close: &str, levels: usize| {
        format!("{}x{}", open.repeat(levels), close.repeat(levels))
    };
    for (open, close) in [
        ("(", ")"),
        ("exp(", ")"),
        ("-", ""),
        ("x^", ""),
        ("2^-", ""),
        ("1 + cos(", ")"),
    ] {
        let levels = MAX_DEPTH / if open == "2^-" { 2 } else { 1 };
        assert!(
            parse_in_pool(&pool(), &nested(open, close, levels)).is_ok(),
            "{open}"
        );
        let error = parse_in_pool(&pool(), &nested(open, close, 100_000)).unwrap_err();
        assert_eq!(error[0].code.id(), "DW0205", "{open}");
    }
}

#[test]
fn powers_are_not_written_out() {
    let pool = pool();
    for text in [
        "9^9^9^9",
        "(2*x)^1000000000",
        "2^(2^(2^100))",
        "(1/3)^-99999999",
        "x^1e300",
    ] {
        assert!(parse_in_pool(&pool, text).is_ok(), "{text}");
    }
}

fn formulas() -> impl Strategy<Value = Recipe> {
    let leaf = prop_oneof![
        (-9i64..=9, 1i64..=9).prop_map(|(p, q)| Recipe::Number(p, q)),
        (0usize..6).prop_map(Recipe::Symbol),
        Just(Recipe::Pi),
    ];
    leaf.prop_recursive(5, 40, 4, |inner| {
        prop_oneof![
            prop::collection::vec(inner.clone(), 2..4).prop_map(Recipe::Sum),
            prop::collection::vec(inner.clone(), 2..4).prop_map(Recipe::Product),
            (inner.clone(), inner.clone()).prop_map(|(a, b)| Recipe::Power(Box::new((a, b)))),
            (inner.clone(), -4i64..=4, 1i64..=3)
                .prop_map(|(a, p, q)| Recipe::Power(Box::new((a, Recipe::Number(p, q))))),
            (0usize..Function::ALL.len(), inner.clone(), inner)
                .prop_map(|(f, a, b)| Recipe::Call(f, Box::new((a, b)))),
        ]
    })
}

/// How to build a formula in a pool.
#[derive(Clone, Debug)]
enum Recipe {
    Number(i64, i64),
    Symbol(usize),
    Pi,
    Sum(Vec<Recipe>),
    Product(Vec<Recipe>),
    Power(Box<(Recipe, Recipe)>),
    Call(usize, Box<(Recipe, Recipe)>),
}

/// Builds it; none where a step has no value, which the parser refuses by design.
fn build(pool: &Pool, recipe: &Recipe) -> Option<Expr> {
    let all = |items: &[Recipe]| {
        items
            .iter()
            .map(|r| build(pool, r))
            .collect::<Option<Vec<Expr>>>()
    };
    Some(match recipe {
        Recipe::Number(p, q) => pool.ratio(*p, *q),
        Recipe::Symbol(i) => pool.var(pool.find_symbol(["t", "a", "b", "σ", "x", "y"][*i])?),
        Recipe::Pi => pool.pi(),
        Recipe::Sum(items) => pool.sum(all(items)?),
        Recipe::Product(items) => pool.product(all(items)?),
        Recipe::Power(parts) => pool.pow(build(pool, &parts.0)?, build(pool, &parts.1)?),
        Recipe::Call(function, parts) => {
            let function = Function::ALL[*function];
            let arguments = [build(pool, &parts.0)?, build(pool, &parts.1)?];
            pool.call(function, &arguments[..function.arity()])
        }
    })
}

/// Whether any part has no real value whatever the symbols' values are.
fn has_undefined_number(pool: &Pool, e: Expr) -> bool {
    let nothing = std::collections::BTreeMap::new();
    let parts = pool.postorder(e).into_iter();
    parts
        .filter(|&part| pool.symbols_of(part).is_empty())
        .any(|part| pool.eval_f64(part, &nothing).is_none())
}

proptest! {
    #![proptest_config(ProptestConfig {
        cases: 2000,
        rng_seed: RngSeed::Fixed(1),
        failure_persistence: None,
        ..ProptestConfig::default()
    })]

    #[test]
    fn what_is_printed_reads_back(recipe in formulas()) {
        let pool = pool();
        let e = build(&pool, &recipe).expect("all symbols are known");
        prop_assume!(!has_undefined_number(&pool, e));
        let text = pool.format(e);
        match parse_in_pool(&pool, &text) {
            Ok(back) => prop_assert_eq!(back, e, "{} came back as {}", text, pool.format(back)),
            Err(errors) => prop_assert!(false, "{}: {:?}", text, errors),
        }
    }

    /// Any text at all gives a formula or errors, never a panic.
    #[test]
    fn any_text_is_answered(text in "[-+*/^(),.<>=0-9eExσ² \\[\\]a-cmt_]{0,40}") {
        let pool = pool();
        if let Err(errors) = parse_in_pool(&pool, &text) {
            prop_assert!(errors.iter().all(|e| e.span.end <= text.len() && e.span.start <= e.span.end));
        }
    }
}
