//! Inequalities that follow from others.
//!
//! Multiplied out, a formula is a linear form in its monomials. A goal follows from facts if it is a
//! sum of non-negative multiples of them and of something that is not negative (Farkas 1902, Journal
//! fuer die reine und angewandte Mathematik 124, 1-27; Motzkin 1936 for strict inequalities). For
//! inequalities that are linear in the symbols nothing else follows; for others a "no" says nothing.

use std::collections::{BTreeMap, BTreeSet};

use super::facts::{Bound, Sign};
use super::node::{Expr, Node, Rational};
use super::pool::Pool;
use super::simplex::{Largest, Tableau};

/// Facts or monomials beyond which nothing is looked for.
const MAX_SIZE: usize = 150;

/// `margin > 0`, or `margin >= 0` where it is not strict.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Inequality {
    /// What is not negative.
    pub margin: Expr,
    /// Whether zero is excluded.
    pub strict: bool,
}

/// A formula as a number and multiples of monomials.
struct Form {
    constant: Rational,
    terms: BTreeMap<Expr, Rational>,
    strict: bool,
}

impl Pool {
    /// The positions of facts that a goal follows from, together with the ranges of the symbols: an
    /// empty list if the ranges alone suffice. None where no proof was found.
    ///
    /// ```
    /// use driftwright::symbolic::{Inequality, Pool, SymbolKind};
    /// let pool = Pool::new();
    /// let [a, b, c] = ["a", "b", "c"].map(|n| pool.var(pool.symbol(n, SymbolKind::Parameter)));
    /// let more = |large, small| Inequality { margin: pool.sub(large, small), strict: true };
    /// assert_eq!(pool.follows(&[more(a, b), more(b, c)], more(a, c)), Some(vec![0, 1]));
    /// assert_eq!(pool.follows(&[more(a, b)], more(a, c)), None);
    /// ```
    pub fn follows(&self, facts: &[Inequality], goal: Inequality) -> Option<Vec<usize>> {
        if holds(self.sign(goal.margin), goal.strict) {
            return Some(Vec::new());
        }
        if facts.len() > MAX_SIZE {
            return None;
        }
        let multiple = facts.iter().position(|fact| self.is_multiple(goal, *fact));
        if let Some(position) = multiple {
            return Some(vec![position]);
        }
        let goal = self.form(goal);
        let mut forms: Vec<Form> = facts.iter().map(|fact| self.form(*fact)).collect();
        self.add_ranges(&goal, &mut forms);
        let used = combination(&forms, &goal)?;
        Some(used.into_iter().filter(|i| *i < facts.len()).collect())
    }

    /// The facts that contradict one another, together with the ranges; none where no contradiction
    /// was found.
    pub fn contradiction(&self, facts: &[Inequality]) -> Option<Vec<usize>> {
        let impossible = facts
            .iter()
            .position(|fact| fails(self.sign(fact.margin), fact.strict));
        if let Some(position) = impossible {
            return Some(vec![position]);
        }
        let nothing = Inequality {
            margin: self.zero(),
            strict: true,
        };
        self.follows(facts, nothing)
    }

    /// Whether a goal is a fact times something positive.
    fn is_multiple(&self, goal: Inequality, fact: Inequality) -> bool {
        let fitting = fact.strict || !goal.strict;
        fitting
            && self
                .sign(self.simplify(self.div(goal.margin, fact.margin)))
                .is_positive()
    }

    fn form(&self, inequality: Inequality) -> Form {
        let expanded = self.expand(inequality.margin);
        let terms = match &*self.node(expanded) {
            Node::Sum(terms) => terms.to_vec(),
            _ => vec![expanded],
        };
        let mut form = Form {
            constant: Rational::ZERO,
            terms: BTreeMap::new(),
            strict: inequality.strict,
        };
        for term in terms {
            let (coefficient, monomial) = match &*self.node(term) {
                Node::Number(value) => {
                    form.constant += value;
                    continue;
                }
                Node::Product(factors) => match self.as_number(factors[0]) {
                    Some(value) => (value, self.without_coefficient(factors)),
                    None => (Rational::ONE, term),
                },
                _ => (Rational::ONE, term),
            };
            *form.terms.entry(monomial).or_insert(Rational::ZERO) += coefficient;
        }
        form
    }

    /// What the ranges say of the monomials: signs, and the ends of ranges of single symbols.
    fn add_ranges(&self, goal: &Form, forms: &mut Vec<Form>) {
        let all = forms.iter().chain([goal]);
        let mut pending: Vec<Expr> = all.flat_map(|form| form.terms.keys().copied()).collect();
        let mut seen = BTreeSet::new();
        while let Some(monomial) = pending.pop() {
            if forms.len() > MAX_SIZE || !seen.insert(monomial) {
                continue;
            }
            let mut known: Vec<Inequality> = self.signed(monomial).into_iter().collect();
            if let Node::Symbol(symbol) = &*self.node(monomial) {
                let range = self.range(*symbol);
                known.extend(end(range.lower, |e| self.sub(monomial, e)));
                known.extend(end(range.upper, |e| self.sub(e, monomial)));
            }
            for fact in known {
                let form = self.form(fact);
                pending.extend(form.terms.keys());
                forms.push(form);
            }
        }
    }

    /// The sign of a formula as an inequality.
    fn signed(&self, e: Expr) -> Option<Inequality> {
        let sign = self.sign(e);
        let margin = if sign.is_non_negative() {
            e
        } else if sign.is_non_positive() {
            self.neg(e)
        } else {
            return None;
        };
        let strict = sign.is_non_zero();
        Some(Inequality { margin, strict })
    }
}

fn end(bound: Bound, margin: impl Fn(Expr) -> Expr) -> Option<Inequality> {
    let strict = matches!(bound, Bound::Open(_));
    let margin = margin(bound.value()?);
    Some(Inequality { margin, strict })
}

/// Whether a margin of this sign always satisfies an inequality.
fn holds(sign: Sign, strict: bool) -> bool {
    sign.is_positive() || (!strict && sign.is_non_negative())
}

/// Whether a margin of this sign never satisfies an inequality.
fn fails(sign: Sign, strict: bool) -> bool {
    sign == Sign::Negative || (strict && sign.is_non_positive())
}

/// Multipliers, not negative, with which the facts add up to no more than the goal: those that are
/// not zero.
fn combination(facts: &[Form], goal: &Form) -> Option<Vec<usize>> {
    let all = facts.iter().chain([goal]);
    let monomials: BTreeSet<Expr> = all.flat_map(|form| form.terms.keys().copied()).collect();
    if facts.len() > 2 * MAX_SIZE || monomials.len() > MAX_SIZE {
        return None;
    }
    let zero = Rational::ZERO;
    let rows = monomials.iter().map(|monomial| {
        let of = |form: &Form| form.terms.get(monomial).unwrap_or(&zero).clone();
        facts.iter().chain([goal]).map(of).collect()
    });
    let mut tableau = Tableau::feasible(rows.collect())?;
    // What is left of the goal's constant decides; if nothing is, a strict fact must have been used.
    let left: Vec<Rational> = facts.iter().map(|fact| -&fact.constant).collect();
    match tableau.maximise(&left, None)? {
        Largest::Unbounded(column) => return Some(tableau.positive(Some(column))),
        Largest::At(value) => {
            let value = value + &goal.constant;
            if value > zero || (value.is_zero() && !goal.strict) {
                return Some(tableau.positive(None));
            }
            if value < zero {
                return None;
            }
        }
    }
    let of_strict = |fact: &Form| Rational::from(u8::from(fact.strict));
    let strict: Vec<Rational> = facts.iter().map(of_strict).collect();
    match tableau.maximise(&strict, Some(&left))? {
        Largest::Unbounded(column) => Some(tableau.positive(Some(column))),
        Largest::At(value) => (value > zero).then(|| tableau.positive(None)),
    }
}
