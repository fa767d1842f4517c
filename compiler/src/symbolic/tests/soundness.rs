//! Two formulas that differ at a point are never proved equal: all pairs of a list of small formulas
//! full of roots, powers, logarithms and absolute values of quantities of either sign.

use std::collections::BTreeMap;

use super::{parse, pool};
use crate::symbolic::{Expr, Pool, Symbol};

/// Quantities of unknown, negative and positive sign, and between 0 and 1.
const LEAVES: [&str; 8] = ["x", "w", "p", "u", "-x", "x + y", "w*x", "1 - u"];

/// Operations that know about signs, applied to each leaf and, some, once more.
const OPERATIONS: [&str; 14] = [
    "sqrt(#)",
    "(#)^2",
    "sqrt((#)^2)",
    "abs(#)",
    "log(#)",
    "log((#)^2)/2",
    "exp(log(#))",
    "cbrt(#)",
    "cbrt((#)^3)",
    "((#)^2)^(a/2)",
    "(#)^a",
    "(#)^3/(#)^2",
    "((#)^3)^(1/3)",
    "exp(log((#)^2)/2)",
];

const OUTER: [&str; 5] = ["#", "sqrt(#)", "-(#)", "sin(#)", "asin(sin(#))"];

fn formulas(pool: &Pool) -> Vec<Expr> {
    let mut list = Vec::new();
    for leaf in LEAVES {
        for operation in OPERATIONS {
            let inner = operation.replace('#', leaf);
            for outer in OUTER {
                list.push(parse(pool, &outer.replace('#', &inner)));
            }
        }
    }
    list.sort_unstable();
    list.dedup();
    list
}

fn points(pool: &Pool) -> Vec<BTreeMap<Symbol, f64>> {
    let rows = [
        [0.7, -1.3, -0.8, 1.9, 0.4, 1.7],
        [-2.1, 0.6, -1.7, 0.3, 0.8, -0.6],
        [1.4, 2.2, -0.2, 2.5, 0.1, 3.0],
    ];
    let names =
        ["x", "y", "w", "p", "u", "a"].map(|name| pool.find_symbol(name).expect("a symbol"));
    rows.into_iter()
        .map(|row| names.into_iter().zip(row).collect())
        .collect()
}

#[test]
fn what_differs_is_not_proved_equal() {
    let pool = pool();
    let points = points(&pool);
    let list = formulas(&pool);
    assert!(list.len() > 300);
    let values: Vec<Vec<Option<f64>>> = list
        .iter()
        .map(|&e| points.iter().map(|point| pool.eval_f64(e, point)).collect())
        .collect();
    let differ = |i: usize, j: usize| {
        values[i].iter().zip(&values[j]).any(|(a, b)| match (a, b) {
            (Some(a), Some(b)) => (a - b).abs() > 1e-9 * (1.0 + a.abs()),
            _ => false,
        })
    };
    let (mut proved, mut wrong) = (0, Vec::new());
    for i in 0..list.len() {
        for j in 0..i {
            if pool.equal_by_algebra(list[i], list[j]) {
                proved += 1;
                if differ(i, j) {
                    wrong.push(format!(
                        "{} = {}",
                        pool.format(list[i]),
                        pool.format(list[j])
                    ));
                }
            }
        }
    }
    assert!(
        wrong.is_empty(),
        "{} wrong proofs:\n{}",
        wrong.len(),
        wrong.join("\n")
    );
    assert!(proved > 300, "only {proved} pairs proved");
}
