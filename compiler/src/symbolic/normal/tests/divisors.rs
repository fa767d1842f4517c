//! Common divisors, quotients and repeated factors of polynomials that were multiplied out of known
//! ones.

use super::{poly, proportional};
use crate::symbolic::Limit;
use crate::symbolic::normal::integer_poly::Budget;
use crate::symbolic::normal::poly::Poly;
use crate::symbolic::tests::pool;

/// Polynomials without a common divisor, none of them a product.
const PRIME: [&str; 12] = [
    "x + y",
    "x - y",
    "x^2 + y",
    "2*x*y - 3",
    "y - x + 1",
    "x + y + z - 4",
    "a*x - b",
    "x^3 + 2*z - 5",
    "y^2 - 3*z^2 + x",
    "sqrt(p) + y",
    "q^(1/3) - 2*x",
    "a^2*b + 7*c + z",
];

fn product(text: &[&str]) -> String {
    let factors: Vec<String> = text.iter().map(|f| format!("({f})")).collect();
    factors.join("*")
}

#[test]
fn a_common_factor_is_the_greatest_common_divisor() {
    let pool = pool();
    for (k, common) in PRIME.iter().enumerate() {
        let others: Vec<&str> = (1..PRIME.len())
            .map(|i| PRIME[(k + i) % PRIME.len()])
            .collect();
        for pair in others.windows(2) {
            let a = poly(&pool, &product(&[pair[0], common]));
            let b = poly(&pool, &product(&[common, pair[1]]));
            let expected = poly(&pool, common);
            for (a, b) in [(&a, &b), (&b, &a)] {
                let found = a.gcd(b, &pool).expect("a common divisor");
                assert!(
                    proportional(&pool, &found, &expected),
                    "{common} of {pair:?}: {found:?}"
                );
            }
            let (a, b) = (poly(&pool, pair[0]), poly(&pool, pair[1]));
            assert_eq!(a.gcd(&b, &pool), None, "{pair:?}");
        }
    }
}

#[test]
fn repeated_factors_and_several_are_common_too() {
    let pool = pool();
    for (a, b, common) in [
        ("(x + y)^3*(x - y)", "(x + y)^2*(x - 2*y)", "(x + y)^2"),
        ("(x - 1)^2*(x + 2)", "(x - 1)*(x + 2)^2", "(x - 1)*(x + 2)"),
        (
            "(x*y - z)*(x + 1)*(y + 2)",
            "(y + 2)*(x*y - z)*z",
            "(x*y - z)*(y + 2)",
        ),
        ("(a^2 + 1)*(x - 1)", "(a^2 + 1)*(y - 1)", "a^2 + 1"),
        ("(a^2 + 1)*(b - 1)", "(a^2 + 1)*(x - b)*(y - 1)", "a^2 + 1"),
        ("6*x^2 - 6*y^2", "4*x^2 + 8*x*y + 4*y^2", "x + y"),
        ("x^4 - 1", "x^6 - 1", "x^2 - 1"),
        ("x^6*y^6 - 1", "x^4*y^4 - 1", "x^2*y^2 - 1"),
        (
            "-3*x*z - 3*y*z + 2*x + 2*y",
            "5*z*x - 5*z*y + 7*x^2 - 7*y^2",
            "none",
        ),
        (
            "(x + y + z + a + b)*(x - 1)",
            "(x + y + z + a + b)*(y - 1)",
            "x + y + z + a + b",
        ),
        (
            "12345678901234567890*x^2 - 12345678901234567890",
            "x^3 - 1",
            "x - 1",
        ),
    ] {
        let found = poly(&pool, a).gcd(&poly(&pool, b), &pool);
        match (common, found) {
            ("none", found) => assert_eq!(found, None, "{a} and {b}"),
            (_, None) => panic!("{a} and {b}"),
            (_, Some(found)) => {
                assert!(
                    proportional(&pool, &found, &poly(&pool, common)),
                    "{a} and {b}"
                );
            }
        }
    }
}

#[test]
fn a_product_divided_by_a_factor_is_the_other() {
    let pool = pool();
    for (i, f) in PRIME.iter().enumerate() {
        for g in &PRIME[..=i] {
            let whole = poly(&pool, &product(&[f, g]));
            let (f, g) = (poly(&pool, f), poly(&pool, g));
            assert_eq!(whole.exact_quotient(&g, &pool).as_ref(), Some(&f));
            let mut more = whole.clone();
            more.add_assign(&Poly::one());
            assert_eq!(more.exact_quotient(&g, &pool), None);
        }
    }
    let (half, by) = (poly(&pool, "x/2 - y/3"), poly(&pool, "5*x + 7*z/4"));
    let whole = poly(&pool, "(x/2 - y/3)*(5*x + 7*z/4)/x^2");
    let quotient = whole.exact_quotient(&by, &pool).expect("a factor");
    assert_eq!(quotient, poly(&pool, "(x/2 - y/3)/x^2"));
    assert_eq!(half.exact_quotient(&by, &pool), None);
}

/// `f*g^2*h^3` comes apart by multiplicity, whatever the variables.
#[test]
fn powers_come_apart_by_their_multiplicity() {
    let pool = pool();
    for chosen in PRIME.windows(3) {
        let [f, g, h] = chosen else {
            unreachable!("three")
        };
        let whole = poly(&pool, &format!("-5*({f})*({g})^2*({h})^3"));
        let (turned, factors) = whole.squarefree(&pool).expect("within budget");
        let mut back = Poly::constant((if turned { -1 } else { 1 }).into());
        for (factor, times) in &factors {
            assert!(proportional(
                &pool,
                factor,
                &poly(&pool, chosen[*times as usize - 1])
            ));
            for _ in 0..*times {
                back = back.raw_product(factor, &pool).expect("a small product");
            }
        }
        assert_eq!(factors.len(), 3, "{chosen:?}");
        // Up to a positive number.
        let content = |p: &Poly| p.positive_content(&pool).expect("a number");
        let scale = content(&whole) / content(&back);
        assert_eq!(back.scaled(&scale), whole, "{chosen:?}");
    }
    let (_, factors) = poly(&pool, "x^2 - y^2")
        .squarefree(&pool)
        .expect("within budget");
    assert_eq!(factors.len(), 1);
}

/// Factors that are free of some variable come out as contents.
#[test]
fn contents_come_out() {
    let pool = pool();
    for (text, parts) in [
        ("(x + 1)*(y + 2)", 2),
        ("(x + y)*(z - a)*(b + 1)", 3),
        ("x*y + 1", 1),
        ("x^2 - 1", 1),
        ("(a + b)*(x - y)*(x + y)", 2),
    ] {
        let whole = poly(&pool, text);
        let found = whole.split_contents(&pool);
        assert_eq!(found.len(), parts, "{text}");
        let mut back = Poly::one();
        for part in &found {
            back = back.raw_product(part, &pool).expect("a small product");
        }
        assert!(proportional(&pool, &back, &whole), "{text}");
    }
}

/// What is spent is gone, and what was left undone for it is noted.
#[test]
fn a_share_of_the_budget_is_spent_once() {
    let pool = pool();
    let share = usize::try_from(Limit::Division.amount() / 10).expect("a small number");
    let mut budget = Budget::share(&pool, 10);
    assert_eq!(budget.spend(share / 2), Some(()));
    assert_eq!(budget.spend(share - share / 2), Some(()));
    assert!(pool.exceeded().is_empty());
    assert_eq!(budget.spend(1), None);
    assert_eq!(pool.exceeded(), [Limit::Division]);
    // It counts for the model as well.
    assert_eq!(pool.operations(), share as u64);
}
