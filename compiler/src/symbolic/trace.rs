//! The log of a derivation: each pass writes what it did, when it does it, and reports print it.

use super::node::Expr;

/// One step of a derivation.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Step {
    /// The rule that was applied, a stable short name.
    pub rule: &'static str,
    /// What the reader should know of this application.
    pub note: String,
    /// The formula it was applied to; none where a derivation starts.
    pub before: Option<Expr>,
    /// The formula that came out.
    pub after: Expr,
}

/// The steps of a derivation, in the order they were taken.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub struct Trace {
    /// The steps.
    pub steps: Vec<Step>,
}

impl Trace {
    /// A trace without steps.
    pub fn new() -> Trace {
        Trace::default()
    }

    /// Appends a step.
    pub fn push(
        &mut self,
        rule: &'static str,
        note: impl Into<String>,
        before: Option<Expr>,
        after: Expr,
    ) {
        self.steps.push(Step {
            rule,
            note: note.into(),
            before,
            after,
        });
    }
}
