//! The derivative of every function against central differences at high precision.

use std::collections::BTreeMap;

use super::{parse, pool};
use crate::symbolic::{Big, Expr, Function, Pool, Symbol};

fn precise(value: f64) -> Big {
    let exact = Big::try_from(value).expect("a finite number");
    exact.with_precision(256).value()
}

/// Arguments at which a function has a value and a slope.
fn arguments(function: Function) -> &'static [f64] {
    match function {
        Function::Acosh => &[1.25, 3.0],
        Function::NormalQuantile => &[0.1, 0.5, 0.875],
        Function::Asin | Function::Acos | Function::Atanh => &[-0.75, 0.25],
        Function::Log | Function::Sqrt => &[0.25, 3.0],
        _ => &[-1.5, 0.5, 2.0],
    }
}

/// The central difference with step 1e-20 has an error of about 1e-40, beside rounding of 1e-57.
fn assert_slope(pool: &Pool, e: Expr, x: Symbol, values: &BTreeMap<Symbol, f64>) {
    let step = precise(1e-20);
    let mut at: BTreeMap<Symbol, Big> = values.iter().map(|(&s, &v)| (s, precise(v))).collect();
    let slope = pool.eval_big(pool.derivative(e, x), &at).expect("a slope");
    let middle = at[&x].clone();
    let mut value = |point: Big| {
        at.insert(x, point);
        pool.eval_big(e, &at).expect("a value")
    };
    let (above, below) = (value(&middle + &step), value(&middle - &step));
    let difference = ((above - below) / (&step + &step)).to_f64().value();
    let slope = slope.to_f64().value();
    let close = (difference - slope).abs() <= 1e-12 * slope.abs().max(1.0);
    assert!(
        close,
        "{} at {values:?}: {slope} for {difference}",
        pool.format(e)
    );
}

#[test]
fn every_function_of_one_argument() {
    let pool = pool();
    let x = pool.find_symbol("x").expect("x");
    let one = |f: &Function| f.arity() == 1;
    for function in Function::ALL
        .into_iter()
        .filter(one)
        .chain([Function::Expm1Ratio])
    {
        for &value in arguments(function) {
            // An inner derivative that is not 1, twice.
            let (third, inner) = (value / 3.0, parse(&pool, "3*x"));
            let e = pool.call(function, &[inner]);
            assert_slope(&pool, e, x, &BTreeMap::from([(x, third)]));
            let slope = pool.derivative(e, x);
            assert_slope(&pool, slope, x, &BTreeMap::from([(x, third)]));
        }
    }
}

#[test]
fn choices_products_and_powers() {
    let pool = pool();
    let [x, y] = ["x", "y"].map(|name| pool.find_symbol(name).expect("a symbol"));
    for text in [
        "max(x^2, y)",
        "min(x^2, y)",
        "max(y, 3*x)*min(2*y, x)",
        "x^3*y^2*sin(x)",
        "(2 + x^2)^(x*y)",
        "3^(x*y)",
        "1/(1 + x^2)^(3/2)",
        "x*y/(x^2 + y^2)",
    ] {
        let e = parse(&pool, text);
        for (u, v) in [(0.5, 2.0), (2.0, 0.5), (1.25, -0.75)] {
            let values = BTreeMap::from([(x, u), (y, v)]);
            assert_slope(&pool, e, x, &values);
            assert_slope(&pool, e, y, &values);
        }
    }
    // Constant inside of where it has a value.
    assert_eq!(pool.derivative(parse(&pool, "(-2)^x"), x), pool.zero());
    let power_of_zero = pool.pow(pool.zero(), pool.var(x));
    assert_eq!(pool.derivative(power_of_zero, x), pool.zero());
    assert_eq!(pool.derivative(parse(&pool, "y^2 + 7"), x), pool.zero());
}
