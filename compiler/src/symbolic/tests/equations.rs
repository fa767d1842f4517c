//! The table of equations: identities are proved, near misses refuted, and what holds only where one
//! side has no value is left open.

use std::collections::BTreeMap;

use super::parse;
use crate::symbolic::{Bound, Expr, Interval, Pool, Symbol, SymbolKind, Truth};

const TABLE: &str = include_str!("equations.txt");

/// One line of the table.
struct Row {
    text: &'static str,
    family: &'static str,
    answer: &'static str,
    left: &'static str,
    right: &'static str,
    ranges: &'static str,
}

fn rows() -> Vec<Row> {
    let mut family = "";
    let mut rows = Vec::new();
    for text in TABLE.lines().filter(|line| !line.starts_with('#')) {
        if let Some(heading) = text.strip_prefix('[') {
            family = heading.trim_end_matches(']');
        } else if !text.is_empty() {
            let mut cells = text.split('|').map(str::trim);
            let mut cell = || cells.next().unwrap_or_default();
            rows.push(Row {
                text,
                family,
                answer: cell(),
                left: cell(),
                right: cell(),
                ranges: cell(),
            });
        }
    }
    rows
}

impl Row {
    /// A pool with the ranges of this line, and the two sides.
    fn equation(&self) -> (Pool, Expr, Expr) {
        let pool = Pool::new();
        for name in "a b c K mu sigma kappa theta p q r s u v w".split(' ') {
            pool.symbol(name, SymbolKind::Parameter);
        }
        pool.symbol("t", SymbolKind::Time);
        for name in "x y z S".split(' ') {
            pool.symbol(name, SymbolKind::State);
        }
        for range in self.ranges.split(';').map(str::trim) {
            if let Some((name, interval)) = range.split_once(' ') {
                let symbol = pool.find_symbol(name).expect("a symbol");
                pool.set_range(symbol, range_of(&pool, interval));
            }
        }
        let (left, right) = (parse(&pool, self.left), parse(&pool, self.right));
        (pool, left, right)
    }
}

/// The interval that a text like `(0, pi/2]` stands for.
fn range_of(pool: &Pool, text: &str) -> Interval {
    let (lower, upper) = text.split_once(',').expect("two ends");
    let end = |text: &str| {
        let bare = text.trim_matches(|c: char| " ()[]".contains(c));
        if bare.ends_with("inf") {
            Bound::Infinite
        } else if text.contains(['[', ']']) {
            Bound::Closed(parse(pool, bare))
        } else {
            Bound::Open(parse(pool, bare))
        }
    };
    Interval {
        lower: end(lower),
        upper: end(upper),
    }
}

/// Asks for every line with that answer, and collects what `judge` objects to.
fn hold_against(answer: &str, judge: impl Fn(&Row) -> Option<String>) {
    let rows: Vec<Row> = rows().into_iter().filter(|r| r.answer == answer).collect();
    let objections: Vec<String> = rows
        .iter()
        .filter_map(|row| Some(format!("{}\n    {}", row.text, judge(row)?)))
        .collect();
    assert!(
        objections.is_empty(),
        "{} of {}:\n{}",
        objections.len(),
        rows.len(),
        objections.join("\n")
    );
}

#[test]
fn every_family_has_identities_and_near_misses() {
    let mut counts: BTreeMap<&str, [usize; 2]> = BTreeMap::new();
    for row in rows() {
        let place = match row.answer {
            "yes" => 0,
            "no" => 1,
            "open" => continue,
            other => panic!("{other}: {}", row.text),
        };
        counts.entry(row.family).or_default()[place] += 1;
    }
    assert!(counts.len() >= 10, "{counts:?}");
    assert!(
        counts.values().all(|c| c[0] >= 20 && c[1] >= 20),
        "{counts:?}"
    );
    for place in 0..2 {
        let total: usize = counts.values().map(|c| c[place]).sum();
        assert!(total >= 600, "{total}");
    }
}

#[test]
fn identities_are_proved() {
    hold_against("yes", |row| {
        let (pool, left, right) = row.equation();
        let answer = pool.equal(left, right);
        (!answer.is_yes()).then(|| format!("{answer:?}"))
    });
}

#[test]
fn near_misses_are_refuted() {
    hold_against("no", |row| {
        let (pool, left, right) = row.equation();
        match pool.equal(left, right) {
            Truth::No(witness) => objection(&pool, (left, right), &witness),
            other => Some(format!("{other:?}")),
        }
    });
}

/// Why a witness does not show what it should; in double precision too, as far as that reaches.
fn objection(
    pool: &Pool,
    (left, right): (Expr, Expr),
    witness: &crate::symbolic::Witness,
) -> Option<String> {
    let point: BTreeMap<Symbol, f64> = witness.point.iter().copied().collect();
    for (&symbol, &value) in &point {
        let Interval { lower, upper } = pool.range(symbol);
        let end = |bound: Bound| bound.value().and_then(|e| pool.eval_f64(e, &point));
        if end(lower).is_some_and(|end| value < end) || end(upper).is_some_and(|end| value > end) {
            return Some(format!("{} = {value}", pool.symbol_name(symbol)));
        }
    }
    let found = (pool.eval_f64(left, &point), pool.eval_f64(right, &point));
    let close =
        |a: f64, b: Option<f64>| b.is_some_and(|b| (a - b).abs() <= 1e-9 * a.abs().max(1.0));
    (!close(witness.left, found.0) || !close(witness.right, found.1))
        .then(|| format!("{witness:?} gives {found:?}"))
}

/// The proofs alone, without the points that would refute them: an error in an argument of theirs could
/// hide behind the refutation, which is asked first.
#[test]
fn no_near_miss_is_proved_by_undoing() {
    hold_against("no", |row| {
        let (pool, left, right) = row.equation();
        pool.equal_by_undoing(left, right)
            .then(|| "is proved by undoing a function".to_string())
    });
}

#[test]
fn what_has_a_value_on_one_side_only_stays_open() {
    hold_against("open", |row| {
        let (pool, left, right) = row.equation();
        let answer = pool.equal(left, right);
        (answer != Truth::CannotTell).then(|| format!("{answer:?}"))
    });
}
