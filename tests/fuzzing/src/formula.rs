//! Properties of any text as a formula.

use std::collections::BTreeMap;

use driftwright::front::formula::parse_in_pool;
use driftwright::symbolic::{Big, Bound, Expr, Interval, Pool, SharedTexts, Symbol, SymbolKind};

use crate::model;

/// Symbols of formulas: states and parameters of any sign, positive ones, time.
const SYMBOLS: [(&str, SymbolKind, bool); 7] = [
    ("t", SymbolKind::Time, true),
    ("x", SymbolKind::State, false),
    ("y", SymbolKind::State, false),
    ("S", SymbolKind::State, true),
    ("a", SymbolKind::Parameter, false),
    ("p", SymbolKind::Parameter, true),
    ("q", SymbolKind::Parameter, true),
];

/// Points at which what the algebra rewrites must keep its value.
const POINTS: [[f64; 7]; 3] = [
    [0.75, 0.625, -1.375, 1.875, 1.25, 0.40625, 2.5],
    [1.5, -0.8125, 0.46875, 0.3125, -2.25, 3.125, 0.875],
    [0.25, 1.6875, 2.1875, 0.8125, 0.53125, 1.125, 0.28125],
];

/// A pool with the symbols and their ranges.
fn pool() -> Pool {
    let pool = Pool::new();
    let positive = Interval {
        lower: Bound::Open(pool.zero()),
        upper: Bound::Infinite,
    };
    for (name, kind, is_positive) in SYMBOLS {
        let symbol = pool.symbol(name, kind);
        if is_positive {
            pool.set_range(symbol, positive);
        }
    }
    pool
}

/// Reads the text as a formula. Where it is one: what is printed reads back as the same formula, also
/// for its derivatives and its simple and expanded forms; rewriting keeps the value; a model that holds
/// it is laid out without a change of meaning.
///
/// # Panics
/// Where one of these fails.
pub fn check(text: &str) {
    let pool = pool();
    let Ok(formula) = parse_in_pool(&pool, text) else {
        return;
    };
    reads_back(&pool, formula);
    for rewritten in [pool.simplify(formula), pool.expand(formula)] {
        reads_back(&pool, rewritten);
        same_value(&pool, formula, rewritten);
    }
    for name in ["x", "S"] {
        let symbol = pool.find_symbol(name).expect("a symbol of the pool");
        let first = pool.derivative(formula, symbol);
        reads_back(&pool, first);
        reads_back(&pool, pool.simplify(first));
        pool.derivative(first, symbol);
    }
    let _ = pool.sign(formula);
    let _ = pool.is_zero(formula);
    assert!(
        !pool.equal(formula, pool.simplify(formula)).is_no(),
        "{text}: its simple form is refuted"
    );
    model::check_layout(&in_a_model(text));
}

/// What is printed for programs is the same formula when it is read, its named parts put back in. Short
/// formulas, which have none, are printed alike for people.
fn reads_back(pool: &Pool, formula: Expr) {
    let read = |text: &str| match parse_in_pool(pool, text) {
        Ok(read) => read,
        Err(errors) => panic!("`{text}` does not read back: {errors:?}"),
    };
    let texts = SharedTexts::new(pool, |_| false);
    let printed = texts.format(formula);
    let mut parts = BTreeMap::new();
    for (name, text) in texts.definitions() {
        let part = pool.substitute(read(&text), &parts);
        parts.insert(pool.symbol(&name, SymbolKind::Auxiliary), part);
    }
    let again = pool.substitute(read(&printed), &parts);
    assert!(
        again == formula,
        "`{printed}` reads back as `{}`",
        pool.format(again)
    );
}

/// Where both have a value that small changes of the point do not upset, it is the same.
fn same_value(pool: &Pool, one: Expr, other: Expr) {
    if one == other {
        return;
    }
    for point in POINTS {
        let near = point.map(|x| x * (1.0 + f64::EPSILON));
        let values = [point, near].map(|at| {
            let at = place(pool, at);
            (pool.eval_big(one, &at), pool.eval_big(other, &at))
        });
        let [(Some(a), Some(b)), (Some(c), Some(d))] = values else {
            continue;
        };
        let [a, b, c, d] = [a, b, c, d].map(|big| big.to_f64().value());
        let far = |x: f64, y: f64| (x - y).abs() > 1e-6 * (x.abs() + y.abs());
        let stable = !far(a, c) && !far(b, d);
        assert!(
            !(stable && far(a, b)),
            "`{}` is {a}, rewritten `{}` it is {b} at {point:?}",
            pool.format(one),
            pool.format(other)
        );
    }
}

fn place(pool: &Pool, point: [f64; 7]) -> BTreeMap<Symbol, Big> {
    SYMBOLS
        .iter()
        .zip(point)
        .map(|((name, ..), value)| {
            let symbol = pool.find_symbol(name).expect("a symbol of the pool");
            let value = Big::try_from(value).expect("a finite number");
            (symbol, value.with_precision(256).value())
        })
        .collect()
}

/// A model whose readout is the formula.
fn in_a_model(formula: &str) -> String {
    let formula = serde_json::Value::from(formula);
    format!(
        "[model]\nname='m'\n[parameters]\na=1\np={{value=1,range='(0,inf)'}}\nq={{value=2,range='(0,inf)'}}\n\
         [states]\nx={{initial='1',drift='x'}}\ny={{initial='1',drift='x'}}\nS={{initial='1',drift='S'}}\n\
         [readouts.F]\nformula={formula}\n"
    )
}
