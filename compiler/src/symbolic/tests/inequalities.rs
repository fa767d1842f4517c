//! Inequalities that follow from others, and that do not.

use super::{parse, pool};
use crate::symbolic::{Inequality, Pool};

fn read(pool: &Pool, text: &str) -> Inequality {
    let (relation, (left, right)) = [">=", ">"]
        .into_iter()
        .find_map(|sign| Some((sign, text.split_once(sign)?)))
        .expect("an inequality");
    Inequality {
        margin: pool.sub(parse(pool, left), parse(pool, right)),
        strict: relation == ">",
    }
}

fn all(pool: &Pool, texts: &[&str]) -> Vec<Inequality> {
    texts.iter().map(|text| read(pool, text)).collect()
}

/// Facts, a goal, and what it follows from.
const FOLLOWS: &[(&[&str], &str, &[usize])] = &[
    (&[], "p + q > 0", &[]),
    (&[], "p >= 0", &[]),
    (&[], "2 > u + v", &[]),
    (&["a > b"], "2*a >= 2*b", &[0]),
    (&["a > b", "b > c"], "a > c", &[0, 1]),
    (&["a >= b", "b > c"], "a > c", &[0, 1]),
    (&["a >= b", "b >= c", "p > 1"], "3*a >= 2*c + b", &[0, 1]),
    (&["2*p*q >= a^2"], "4*p*q >= a^2", &[0]),
    (&["2*p*q >= a^2"], "q >= a^2/(2*p)", &[0]),
    (&["p >= 2*q"], "p > q", &[0]),
    (&["a + b >= 1", "a - b >= 1"], "a >= 1", &[0, 1]),
    (&["a > 3"], "a > 2", &[0]),
    (&["a*p > b*p"], "a > b", &[0]),
    (&["a >= 1 + exp(b)"], "a > 1", &[0]),
    (&[], "exp(u) > 1", &[]),
    (&[], "exp(u) >= 1", &[]),
    (&["a*p >= b*p"], "a >= b", &[0]),
    (&["a*p > b*p"], "a >= b", &[0]),
    // What the ranges add: p > 0, w < 0, u < 1.
    (&["a >= p"], "a > 0", &[0]),
    (&["a > b"], "a > b + w", &[0]),
    (&["a >= u"], "a + 1 > u", &[0]),
    (&["b >= 3*u - a"], "a + b >= 3*u - p", &[0]),
    (&["u >= a"], "1 > a", &[0]),
    (&["a >= 3", "b >= 4"], "a + b >= 7", &[0, 1]),
    (&["a >= 3", "b >= 4"], "2*a + 3*b > 17", &[0, 1]),
    (&["a + b >= 2", "a - b >= 4", "c >= 1"], "a >= 3", &[0, 1]),
];

/// Facts and what does not follow from them.
const OPEN: &[(&[&str], &str)] = &[
    (&[], "a > b"),
    (&[], "p > q"),
    (&["a >= b", "b >= c"], "a > c"),
    (&["a > 2"], "a > 3"),
    (&["2*p*q >= a^2"], "p*q >= a^2"),
    (&["p >= q"], "p > 2*q"),
    (&["a > b"], "a^2 > b^2"),
    (&["a > b"], "a*c > b*c"),
    (&["a >= 1"], "a > 1"),
    (&["a*p >= b*p"], "a > b"),
    (&["a*w > b*w"], "a > b"),
    (&["a >= 3", "b >= 4"], "a + b > 7"),
    (&["a >= 3", "b >= 4"], "a - b >= -1"),
    (&["a >= p"], "a > 1"),
    (&["a >= u"], "a > u"),
    (&["a >= b"], "a > b + u"),
    (&["a >= 1.000000001"], "a > 1.000000001"),
];

#[test]
fn what_follows_is_proved_from_what_it_needs() {
    for (facts, goal, used) in FOLLOWS {
        let pool = pool();
        let proof = pool.follows(&all(&pool, facts), read(&pool, goal));
        assert_eq!(proof.as_deref(), Some(*used), "{goal}");
    }
}

#[test]
fn what_does_not_follow_stays_open() {
    for (facts, goal) in OPEN {
        let pool = pool();
        let facts = all(&pool, facts);
        assert_eq!(pool.follows(&facts, read(&pool, goal)), None, "{goal}");
        assert_eq!(pool.contradiction(&facts), None, "{goal}");
    }
}

#[test]
fn contradictions_are_found_among_several() {
    for (facts, used) in [
        (&["p > 1", "a > b", "b > c", "c >= a"][..], &[1, 2, 3][..]),
        (&["a > 1", "b > 2", "3 > a + b"], &[0, 1, 2]),
        (&["a > b", "0 > p"], &[1]),
        (&["2*p*q >= a^2", "a^2 > 3*p*q"], &[0, 1]),
        (&["a > b", "b >= a"], &[0, 1]),
        (&["a > u", "0 > a"], &[0, 1]),
        (&["a > b", "1 > exp(u)"], &[1]),
        (&["a > b", "1 >= exp(u)"], &[1]),
    ] {
        let pool = pool();
        let proof = pool.contradiction(&all(&pool, facts));
        assert_eq!(proof.as_deref(), Some(used), "{facts:?}");
    }
    let pool = pool();
    for facts in [
        ["a >= b", "b >= a"],
        ["a > 1", "3 > a"],
        ["p >= q", "2*q > p"],
    ] {
        assert_eq!(pool.contradiction(&all(&pool, &facts)), None, "{facts:?}");
    }
}
