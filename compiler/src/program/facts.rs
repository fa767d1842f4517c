//! Facts of the model that hang on parameter values, for whoever runs it.

pub use crate::analysis::condition::Relates;

use super::op::ValueId;

/// A comparison of two values of rate constant or setup.
pub type Compared = (ValueId, Relates, ValueId);

/// A statement that is true if and only if all comparisons of one alternative hold.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fact {
    /// The statement, in words.
    pub statement: String,
    /// The condition, as a formula.
    pub condition: String,
    /// The alternatives.
    pub alternatives: Vec<Vec<Compared>>,
}

impl Fact {
    /// The values the condition reads.
    pub fn operands(&self) -> impl Iterator<Item = ValueId> + '_ {
        let comparisons = self.alternatives.iter().flatten();
        comparisons.flat_map(|&(left, _, right)| [left, right])
    }

    /// The fact with every value replaced.
    pub(super) fn map(self, f: impl Fn(ValueId) -> ValueId) -> Self {
        let compared = |(left, relates, right)| (f(left), relates, f(right));
        let all = |all: Vec<Compared>| all.into_iter().map(compared).collect();
        Self {
            alternatives: self.alternatives.into_iter().map(all).collect(),
            ..self
        }
    }
}
