//! The left sides and signs that the passes write as text: derivative operators, covariations, starts.

use super::{Name, Notation};
use crate::symbolic::Pool;

/// What a text of the neutral document is as notation; words where it is nothing else.
pub(super) fn read(pool: &Pool, text: &str) -> Notation {
    derivative(pool, text)
        .or_else(|| covariation(pool, text))
        .or_else(|| start(pool, text))
        .unwrap_or_else(|| {
            if text.chars().all(|c| c.is_alphanumeric() || c == '_') && is_name(text) {
                Notation::Name(Name::new(pool, text))
            } else if text.chars().any(char::is_alphabetic) {
                Notation::Words(text.to_owned())
            } else {
                Notation::Sign(text.to_owned())
            }
        })
}

fn is_name(text: &str) -> bool {
    text.starts_with(char::is_alphabetic)
}

/// `d/dx`, `d^2/dx^2`, `d^2/dx dy`.
fn derivative(pool: &Pool, text: &str) -> Option<Notation> {
    let name = |text: &str| is_name(text).then(|| Name::new(pool, text));
    if let Some(along) = text.strip_prefix("d/d") {
        return Some(Notation::Partial(vec![(name(along)?, 1)]));
    }
    let along = text.strip_prefix("d^2/d")?;
    if let Some(along) = along.strip_suffix("^2") {
        return Some(Notation::Partial(vec![(name(along)?, 2)]));
    }
    let (x, y) = along.split_once(" d")?;
    Some(Notation::Partial(vec![(name(x)?, 1), (name(y)?, 1)]))
}

/// `d<x, y>/dt`.
fn covariation(pool: &Pool, text: &str) -> Option<Notation> {
    let pair = text.strip_prefix("d<")?.strip_suffix(">/dt")?;
    let (x, y) = pair.split_once(", ")?;
    Some(Notation::Covariation(
        Name::new(pool, x),
        Name::new(pool, y),
    ))
}

/// `x(0)`.
fn start(pool: &Pool, text: &str) -> Option<Notation> {
    let name = text.strip_suffix("(0)").filter(|name| is_name(name))?;
    Some(Notation::Product(vec![
        Notation::Name(Name::new(pool, name)),
        Notation::Fenced(Box::new(Notation::Number("0".to_owned()))),
    ]))
}
