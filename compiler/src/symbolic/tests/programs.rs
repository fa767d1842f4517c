//! Linear programs whose answer is known.

use crate::symbolic::Rational;
use crate::symbolic::simplex::{Largest, Tableau};

fn numbers<const N: usize>(values: [i64; N]) -> Vec<Rational> {
    values.into_iter().map(Rational::from).collect()
}

fn tableau<const N: usize>(rows: &[[i64; N]]) -> Option<Tableau> {
    Tableau::feasible(rows.iter().map(|row| numbers(*row)).collect())
}

fn attained(found: Option<Largest>) -> Rational {
    match found {
        Some(Largest::At(value)) => value,
        Some(Largest::Unbounded(column)) => panic!("unbounded along {column}"),
        None => panic!("not found"),
    }
}

/// V. Chvatal (1983), Linear Programming, chapter 2: the largest `5x + 4y + 3z` is 13, at (2, 0, 1).
#[test]
fn a_textbook_program() {
    let rows = [
        [2, 3, 1, 1, 0, 0, 5],
        [4, 1, 2, 0, 1, 0, 11],
        [3, 4, 2, 0, 0, 1, 8],
    ];
    let mut found = tableau(&rows).expect("a feasible point");
    let values = numbers([5, 4, 3, 0, 0, 0]);
    assert_eq!(attained(found.maximise(&values, None)), Rational::from(13));
    // x and z, and the slack of the second row: 11 - 8 - 2 = 1.
    assert_eq!(found.positive(None), [0, 2, 4]);
}

/// E. M. L. Beale (1955), Naval Research Logistics Quarterly 2, 269-275: the largest-coefficient rule
/// cycles here, Bland's rule does not. The largest value is 1/20, at x = 1/25 and z = 1. Scaled to whole numbers.
#[test]
fn a_degenerate_program_ends() {
    // 1/4 x - 60 y - 1/25 z + 9 w <= 0, 1/2 x - 90 y - 1/50 z + 3 w <= 0, z <= 1
    let rows = [
        [25, -6000, -4, 900, 100, 0, 0, 0],
        [25, -4500, -1, 150, 0, 50, 0, 0],
        [0, 0, 1, 0, 0, 0, 1, 1],
    ];
    let mut found = tableau(&rows).expect("a feasible point");
    // 3/4 x - 150 y + 1/50 z - 6 w, a hundred times
    let values = numbers([75, -15000, 2, -600, 0, 0, 0]);
    assert_eq!(attained(found.maximise(&values, None)), Rational::from(5));
}

#[test]
fn rows_may_contradict_or_repeat_one_another() {
    assert!(tableau(&[[1, 1, -1]]).is_none());
    assert!(tableau(&[[1, 1, 1], [1, 1, 2]]).is_none());
    assert!(tableau(&[[-1, -1, 1]]).is_none());
    assert!(tableau(&[[-1, -1, -1]]).is_some());
    // The same row twice, with a sign, and one that says 0 = 0.
    let rows = [[0, 0, 0, 0], [1, 2, 0, 4], [-1, -2, 0, -4], [0, 0, 1, 3]];
    let mut found = tableau(&rows).expect("a feasible point");
    assert_eq!(
        attained(found.maximise(&numbers([1, 0, 0]), None)),
        Rational::from(4)
    );
    assert_eq!(found.positive(None), [0, 2]);
    assert_eq!(
        attained(found.maximise(&numbers([0, 1, 1]), None)),
        Rational::from(5)
    );
    assert_eq!(found.positive(None), [1, 2]);
}

#[test]
fn what_only_zero_solves_is_zero() {
    // -x - y = 0 and x, y >= 0
    let mut found = tableau(&[[-1, -1, 0, 0], [0, -1, -1, 0]]).expect("a feasible point");
    for values in [[1, 0, 0], [0, 1, 0], [0, 0, 1]] {
        assert_eq!(
            attained(found.maximise(&numbers(values), None)),
            Rational::ZERO
        );
        assert!(found.positive(None).is_empty());
    }
}

#[test]
fn what_grows_without_end_is_said_to() {
    // x - y = 1
    let mut found = tableau(&[[1, -1, 0, 1], [0, 0, 1, 2]]).expect("a feasible point");
    let Some(Largest::Unbounded(column)) = found.maximise(&numbers([1, 1, 0]), None) else {
        panic!("x and y grow together")
    };
    let moving = found.positive(Some(column));
    assert_eq!(moving, [0, 1, 2]);
    assert_eq!(
        attained(found.maximise(&numbers([1, -1, 0]), None)),
        Rational::ONE
    );
}

/// A second goal, of what is best for a first one.
#[test]
fn the_second_goal_keeps_the_first() {
    // x + y + s = 4: of all points with the largest x + y, the one with the largest y.
    let mut found = tableau(&[[1, 1, 1, 4]]).expect("a feasible point");
    let first = numbers([1, 1, 0]);
    assert_eq!(attained(found.maximise(&first, None)), Rational::from(4));
    let second = numbers([0, 1, 3]);
    assert_eq!(
        attained(found.maximise(&second, Some(&first))),
        Rational::from(4)
    );
    assert_eq!(found.positive(None), [1]);
    assert_eq!(attained(found.maximise(&second, None)), Rational::from(12));
}

#[test]
fn fractions_stay_exact() {
    // 3x + 7y + s = 10, 5x + 2y + t = 8: the largest x + y is at the crossing, x = 36/29, y = 26/29.
    let mut found = tableau(&[[3, 7, 1, 0, 10], [5, 2, 0, 1, 8]]).expect("a feasible point");
    let largest = attained(found.maximise(&numbers([1, 1, 0, 0]), None));
    assert_eq!(largest, Rational::from_parts(62.into(), 29u8.into()));
    assert_eq!(found.positive(None), [0, 1]);
}
