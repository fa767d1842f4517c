//! A pass's log as equations, in the order in which it was written.

use super::document::{Equation, Math, Term, symbol};
use crate::symbolic::trace::Trace;

/// Rules whose note is the left side of an equation (`d/dS`), not a remark about it.
const NOTE_IS_THE_LEFT_SIDE: &[&str] = &[
    "time derivative",
    "first derivative",
    "second derivative",
    "covariation",
];

/// The log, step by step: `left = before = after`, with a remark.
pub(super) fn equations(trace: &Trace) -> Vec<Equation> {
    trace
        .steps
        .iter()
        .map(|step| {
            let mut right = Math::new();
            if let Some(before) = step.before.filter(|before| *before != step.after) {
                right.push(Term::Formula(before));
                right.push(Term::Symbol("=".to_owned()));
            }
            right.push(Term::Formula(step.after));
            let (left, remark) = if NOTE_IS_THE_LEFT_SIDE.contains(&step.rule) {
                (step.note.as_str(), step.rule)
            } else {
                (step.rule, step.note.as_str())
            };
            Equation::new(symbol(left), right).remark(remark)
        })
        .collect()
}
