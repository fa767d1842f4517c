//! Conditions in the parameters under which a fact holds, and what ranges and assumptions say of them.

use std::fmt::Write as _;

use super::assume;
use crate::model::Model;
use crate::symbolic::{Expr, Inequality, Node, Pool, Rational, Sign};

/// How the sides of a condition compare.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Relates {
    /// `left > right`
    Greater,
    /// `left >= right`
    AtLeast,
    /// `left = right`
    Equal,
}

impl Relates {
    /// The sign between the sides.
    pub fn sign(self) -> &'static str {
        match self {
            Self::Greater => ">",
            Self::AtLeast => ">=",
            Self::Equal => "=",
        }
    }
}

/// `left relates right`, both sides in the parameters.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Condition {
    /// The left side.
    pub left: Expr,
    /// The comparison.
    pub relates: Relates,
    /// The right side.
    pub right: Expr,
}

/// What ranges and assumptions say of a statement.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Standing {
    /// It holds for all admissible parameters.
    Implied,
    /// It holds for no admissible parameters.
    Contradicted,
    /// Neither follows.
    Open,
}

impl Standing {
    /// The name in JSON.
    pub fn name(self) -> &'static str {
        match self {
            Self::Implied => "implied",
            Self::Contradicted => "contradicted",
            Self::Open => "open",
        }
    }
}

/// All of these hold; an empty list always does.
pub type All = Vec<Condition>;

impl Condition {
    /// `left > right`
    pub fn greater(left: Expr, right: Expr) -> Self {
        Self {
            left,
            relates: Relates::Greater,
            right,
        }
    }

    /// `left >= right`
    pub fn at_least(left: Expr, right: Expr) -> Self {
        Self {
            left,
            relates: Relates::AtLeast,
            right,
        }
    }

    /// `left = right`
    pub fn equal(left: Expr, right: Expr) -> Self {
        Self {
            left,
            relates: Relates::Equal,
            right,
        }
    }

    /// Left side less the right one.
    pub fn margin(&self, pool: &Pool) -> Expr {
        pool.simplify(pool.sub(self.left, self.right))
    }

    /// Whether it holds for all admissible parameters, or for none.
    pub fn standing(&self, model: &Model) -> Standing {
        self.judged(assume::sign(model, self.margin(&model.pool)))
    }

    /// Whether it holds or fails as a statement about numbers, no parameter in it.
    fn literal(&self, pool: &Pool) -> Standing {
        let margin = self.margin(pool);
        match pool.symbols_of(margin).is_empty() {
            true => self.judged(pool.sign(margin)),
            false => Standing::Open,
        }
    }

    fn judged(&self, margin: Sign) -> Standing {
        use Relates::{AtLeast, Equal, Greater};
        match (self.relates, margin) {
            (_, Sign::Unknown) => Standing::Open,
            (Greater, Sign::Positive) | (Equal, Sign::Zero) => Standing::Implied,
            (AtLeast, sign) if sign.is_non_negative() => Standing::Implied,
            (Greater, sign) if sign.is_non_positive() => Standing::Contradicted,
            (_, Sign::Negative) | (Equal, Sign::Positive) => Standing::Contradicted,
            _ => Standing::Open,
        }
    }

    /// As inequalities for the algebra.
    fn inequalities(&self, pool: &Pool) -> Vec<Inequality> {
        let margin = self.margin(pool);
        let inequality = |margin, strict| Inequality { margin, strict };
        match self.relates {
            Relates::Greater => vec![inequality(margin, true)],
            Relates::AtLeast => vec![inequality(margin, false)],
            Relates::Equal => vec![
                inequality(margin, false),
                inequality(pool.neg(margin), false),
            ],
        }
    }

    /// The same condition as people write it: the shorter of the sides as they are, simplified, and of the margin's
    /// terms sorted by their signs, without common factors that are positive.
    pub fn written(&self, pool: &Pool) -> Self {
        let plain = Self {
            left: pool.simplify(self.left),
            right: pool.simplify(self.right),
            ..*self
        };
        let margin = self.margin(pool);
        if pool.is_heavy(margin) {
            return plain;
        }
        let (left, right) = balanced(pool, without_positive_factors(pool, margin));
        let sorted = Self {
            left,
            right,
            ..*self
        };
        let length = |c: &Self| c.format(pool).chars().count();
        if length(&sorted) < length(&plain) {
            sorted
        } else {
            plain
        }
    }

    /// `2*kappa*theta >= sigma^2`; `gamma <= 1` where the left side is a number.
    pub fn format(&self, pool: &Pool) -> String {
        let (left, right) = (pool.format(self.left), pool.format(self.right));
        let number = pool.as_number(self.left).is_some();
        match self.relates {
            Relates::Greater if number => format!("{right} < {left}"),
            Relates::AtLeast if number => format!("{right} <= {left}"),
            relates => format!("{left} {} {right}", relates.sign()),
        }
    }
}

/// A product without the factors that are positive whatever the parameters.
fn without_positive_factors(pool: &Pool, margin: Expr) -> Expr {
    match &*pool.node(margin) {
        Node::Product(factors) => {
            let kept = factors.iter().copied();
            let kept: Vec<Expr> = kept.filter(|&f| !pool.sign(f).is_positive()).collect();
            if kept.iter().all(|&f| pool.as_number(f).is_some()) {
                margin
            } else {
                pool.product(kept)
            }
        }
        _ => margin,
    }
}

/// The terms of a formula with positive and with negative coefficients, divided by what their numbers have in
/// common: `2*gamma - 2` gives `gamma` and `1`.
fn balanced(pool: &Pool, margin: Expr) -> (Expr, Expr) {
    let expanded = pool.expand(margin);
    let terms = match &*pool.node(expanded) {
        Node::Sum(terms) => terms.to_vec(),
        _ => vec![expanded],
    };
    let coefficient = |term: Expr| match &*pool.node(term) {
        Node::Number(value) => value.clone(),
        Node::Product(factors) => pool.as_number(factors[0]).unwrap_or(Rational::ONE),
        _ => Rational::ONE,
    };
    let size = |value: Rational| {
        if value < Rational::ZERO {
            -value
        } else {
            value
        }
    };
    let sizes: Vec<Rational> = terms.iter().map(|&t| size(coefficient(t))).collect();
    let largest_common = sizes
        .iter()
        .find(|c| sizes.iter().all(|other| (other / *c).is_int()));
    let unit = pool.number(largest_common.cloned().unwrap_or(Rational::ONE));
    let side = |negative: bool| {
        let chosen = terms
            .iter()
            .filter(|&&t| (coefficient(t) < Rational::ZERO) == negative);
        let sum = pool.sum(chosen.map(|&t| pool.div(t, unit)).collect::<Vec<_>>());
        if negative { pool.neg(sum) } else { sum }
    };
    (pool.simplify(side(false)), pool.simplify(side(true)))
}

/// Conditions that can hold together, those left out that follow from the others or are true of numbers; none where
/// they contradict one another.
pub fn consistent(pool: &Pool, conditions: impl IntoIterator<Item = Condition>) -> Option<All> {
    let mut kept = All::new();
    for condition in conditions {
        match condition.literal(pool) {
            Standing::Implied => continue,
            Standing::Contradicted => return None,
            Standing::Open if kept.contains(&condition) => continue,
            Standing::Open => kept.push(condition),
        }
    }
    if kept.len() < 2 {
        return Some(kept);
    }
    let all: Vec<Inequality> = kept.iter().flat_map(|c| c.inequalities(pool)).collect();
    if pool.contradiction(&all).is_some() && !kept.iter().any(|c| alone_impossible(pool, c)) {
        return None;
    }
    let mut i = 0;
    while i < kept.len() {
        let others = kept.iter().enumerate().filter(|(j, _)| *j != i);
        let facts: Vec<Inequality> = others.flat_map(|(_, c)| c.inequalities(pool)).collect();
        let follows = |goal: Inequality| {
            pool.follows(&facts, goal)
                .is_some_and(|used| !used.is_empty())
        };
        if kept[i].inequalities(pool).into_iter().all(follows) {
            kept.remove(i);
        } else {
            i += 1;
        }
    }
    Some(kept)
}

/// Whether the ranges alone exclude a condition: then that is worth saying, and no contradiction of several.
fn alone_impossible(pool: &Pool, condition: &Condition) -> bool {
    condition.judged(pool.sign(condition.margin(pool))) == Standing::Contradicted
}

/// Whether all of the conditions hold.
pub fn all_standing(model: &Model, conditions: &[Condition]) -> Standing {
    let mut standing = Standing::Implied;
    for condition in conditions {
        match condition.standing(model) {
            Standing::Contradicted => return Standing::Contradicted,
            Standing::Open => standing = Standing::Open,
            Standing::Implied => {}
        }
    }
    standing
}

/// Alternatives as people want them: those that cannot be left out where others can hold, conditions that always hold
/// left out beside others, and `=` joined with `>` to `>=`.
pub fn concise(model: &Model, alternatives: Vec<All>) -> Vec<All> {
    let possible = |all: &All| all_standing(model, all) != Standing::Contradicted;
    let mut kept: Vec<All> = if alternatives.iter().any(possible) {
        alternatives.into_iter().filter(possible).collect()
    } else {
        alternatives
    };
    for all in &mut kept {
        if all_standing(model, all) == Standing::Open {
            all.retain(|c| c.standing(model) != Standing::Implied);
        }
        for condition in all.iter_mut() {
            *condition = condition.written(&model.pool);
        }
    }
    joined(&model.pool, kept)
}

/// Joins `a = b` and `a > b` where they are single alternatives.
pub fn joined(pool: &Pool, mut alternatives: Vec<All>) -> Vec<All> {
    let single = |all: &All| match all[..] {
        [condition] => Some(condition),
        _ => None,
    };
    let mut i = 0;
    while i < alternatives.len() {
        let partner = single(&alternatives[i]).and_then(|equal| {
            (equal.relates == Relates::Equal)
                .then(|| position_of_strict(pool, &alternatives, equal))?
        });
        match partner {
            Some(j) => {
                alternatives[j][0].relates = Relates::AtLeast;
                alternatives.remove(i);
            }
            None => i += 1,
        }
    }
    alternatives
}

/// The single alternative that is the strict version of an equation.
fn position_of_strict(pool: &Pool, alternatives: &[All], equal: Condition) -> Option<usize> {
    alternatives.iter().position(|all| match all[..] {
        [strict] if strict.relates == Relates::Greater => {
            let ratio = pool.div(strict.margin(pool), equal.margin(pool));
            pool.symbols_of(pool.simplify(ratio)).is_empty()
        }
        _ => false,
    })
}

/// `a > b and c >= d, or e > f`; `always` and `never` where there is nothing to decide.
pub fn format(pool: &Pool, alternatives: &[All]) -> String {
    if alternatives.iter().any(Vec::is_empty) {
        return "always".to_owned();
    }
    let mut text = String::new();
    for (i, all) in alternatives.iter().enumerate() {
        let parts: Vec<String> = all.iter().map(|c| c.format(pool)).collect();
        let between = if i == 0 { "" } else { ", or " };
        write!(text, "{between}{}", parts.join(" and ")).expect("a string takes all text");
    }
    if text.is_empty() {
        text.push_str("never");
    }
    text
}
