//! Budgets of the algebra, exceeded: what is left undone is said, and no answer becomes wrong.

use crate::symbolic::{Expr, Function, Limit, Pool, SymbolKind, Truth};

/// Distinct parameters.
fn parameters(pool: &Pool, prefix: &str, count: usize) -> Vec<Expr> {
    let named = (0..count).map(|k| pool.symbol(&format!("{prefix}{k}"), SymbolKind::Parameter));
    named.map(|symbol| pool.var(symbol)).collect()
}

/// The sum of distinct parameters.
fn sum(pool: &Pool, prefix: &str, count: usize) -> Expr {
    pool.sum(parameters(pool, prefix, count))
}

fn assert_exceeded(pool: &Pool, limit: Limit) {
    let exceeded = pool.exceeded();
    assert!(exceeded.contains(&limit), "{limit:?} not in {exceeded:?}");
}

#[test]
fn products_stay_products() {
    let pool = Pool::new();
    let product = pool.mul(sum(&pool, "a", 300), sum(&pool, "b", 300));
    assert_eq!(pool.simplify(product), product);
    assert_exceeded(&pool, Limit::Product);
}

#[test]
fn all_products_together() {
    let pool = Pool::new();
    let left = sum(&pool, "a", 200);
    for k in 0..40 {
        pool.simplify(pool.mul(left, sum(&pool, &format!("b{k}_"), 200)));
    }
    assert_exceeded(&pool, Limit::Algebra);
    // Small questions are answered as before.
    let a = parameters(&pool, "a", 2);
    let square = pool.square(pool.add(a[0], a[1]));
    assert!(pool.equal(square, pool.expand(square)).is_yes());
}

#[test]
fn products_are_not_expanded() {
    let pool = Pool::new();
    let product = pool.mul(sum(&pool, "a", 60), sum(&pool, "b", 60));
    assert_eq!(pool.expand(product), product);
    assert_exceeded(&pool, Limit::Expansion);
}

#[test]
fn long_sums_keep_their_shape() {
    let pool = Pool::new();
    let long = sum(&pool, "a", 2_000);
    assert_eq!(pool.simplify(long), long);
    assert_exceeded(&pool, Limit::Simplification);
}

#[test]
fn long_formulas_are_cut_where_they_are_printed() {
    let pool = Pool::new();
    let text = pool.format(sum(&pool, "a", 5_000));
    assert!(text.ends_with("(cut at 6000 characters; the formula has 5001 distinct parts)"));
    assert!(text.len() < 6_100);
    assert_exceeded(&pool, Limit::Printing);
    let text = pool.format(sum(&pool, "a", 7_000));
    assert_eq!(
        text,
        "... (too long to print: the formula has 7001 distinct parts)"
    );
}

#[test]
fn shared_parts_are_printed_once() {
    let pool = super::pool();
    let mut e = super::parse(&pool, "x");
    for _ in 0..30 {
        e = pool.add(pool.sqrt(e), pool.exp(e));
    }
    let text = pool.format(e);
    assert!(text.len() < 2_000, "{text}");
    assert!(text.contains(" where "), "{text}");
    assert!(pool.exceeded().is_empty());
}

#[test]
fn numbers_without_a_short_common_denominator_stay_in_their_terms() {
    let pool = super::pool();
    // Powers of eleven primes, each of about 1,600 bits.
    let primes = [3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37];
    parameters(&pool, "a", primes.len());
    let terms = primes.iter().enumerate().map(|(k, &prime)| {
        let exponent = (1_600.0 / f64::from(prime).log2()) as u32;
        format!("a{k}/{prime}^{exponent}")
    });
    let sum = super::parse(&pool, &terms.collect::<Vec<_>>().join(" + "));
    assert_eq!(pool.simplify(sum), sum);
    assert_exceeded(&pool, Limit::Denominator);
}

#[test]
fn fewer_points_are_tried_of_long_formulas() {
    let pool = super::pool();
    let waves = parameters(&pool, "a", 3_000).into_iter();
    let long = pool.sum(waves.map(|a| pool.call(Function::Sin, &[a])));
    let (left, right) = (
        super::parse(&pool, "log(x^2)"),
        super::parse(&pool, "2*log(x)"),
    );
    // Alone, the answer is the same, within the budget.
    assert!(matches!(pool.equal(left, right), Truth::CannotTell));
    assert!(!pool.exceeded().contains(&Limit::Witness));
    let question = pool.equal(pool.add(long, left), pool.add(long, right));
    assert!(matches!(question, Truth::CannotTell));
    assert_exceeded(&pool, Limit::Witness);
}
