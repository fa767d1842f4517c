//! Long formulas that are printed in parts read back as themselves.

use std::collections::BTreeMap;

use super::parse;
use crate::symbolic::{Expr, Pool, Symbol, SymbolKind};

/// The formula that a text `main where p1 = ...; p2 = ...` stands for, and its names.
fn read_back(pool: &Pool, text: &str) -> (Expr, Vec<String>) {
    let (main, definitions) = text.split_once(" where ").unwrap_or((text, ""));
    let mut known: BTreeMap<Symbol, Expr> = BTreeMap::new();
    let mut names = Vec::new();
    for definition in definitions.split("; ").filter(|d| !d.is_empty()) {
        let (name, body) = definition.split_once(" = ").expect("a definition");
        assert_eq!(pool.find_symbol(name), None, "{name} is taken");
        let value = pool.substitute(parse(pool, body), &known);
        known.insert(pool.symbol(name, SymbolKind::Auxiliary), value);
        names.push(name.to_owned());
    }
    (pool.substitute(parse(pool, main), &known), names)
}

fn pool() -> Pool {
    let pool = Pool::new();
    for name in ["x", "y", "a", "p2", "p3", "pp3"] {
        pool.symbol(name, SymbolKind::Parameter);
    }
    pool
}

#[test]
fn shared_parts_are_named_once_and_read_back() {
    let pool = pool();
    let mut e = parse(&pool, "x + a*y");
    for _ in 0..14 {
        e = pool.add(pool.sqrt(e), pool.exp(pool.neg(e)));
    }
    let text = pool.format(e);
    let (found, names) = read_back(&pool, &text);
    assert_eq!(found, e, "{text}");
    // The next free ones in turn: p2, p3 and pp3 belong to the model.
    assert_eq!(names[..4], ["p1", "pp2", "ppp3", "p4"], "{text}");
    for name in &names {
        let uses = text
            .split(|c: char| !c.is_alphanumeric())
            .filter(|word| word == name);
        assert!(uses.count() > 2, "{name} in {text}");
    }
    assert!(pool.exceeded().is_empty());
}

/// What is read once is written where it stands, unless it fills a page; what is light has no name.
#[test]
fn what_is_light_or_read_once_has_no_name() {
    let pool = pool();
    let summand = |k: i64| parse(&pool, &format!("{k}*x^{k}*(y + {k})"));
    let group = |g: i64| pool.exp(pool.sum((30 * g + 1..30 * g + 31).map(summand)));
    let once = pool.sum((0..7).map(group));
    let text = pool.format(once);
    let (found, names) = read_back(&pool, &text);
    assert_eq!(found, once, "{text}");
    assert!(names.is_empty(), "{text}");
    let long = pool.sum((1..190).map(summand));
    let page = pool.add(pool.exp(long), parse(&pool, "a*x + x"));
    let text = pool.format(page);
    let (found, names) = read_back(&pool, &text);
    assert_eq!(found, page, "{text}");
    assert_eq!(names, ["p1"], "{text}");
    assert!(pool.exceeded().is_empty());
}
