//! What a constructor checks, the same in every back end.

use super::op::{Comparison, ValueId};

/// One end of a range.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Bound {
    /// No end.
    Infinite,
    /// The end is excluded.
    Open(ValueId),
    /// The end is included.
    Closed(ValueId),
}

impl Bound {
    /// The end, where there is one.
    pub fn value(self) -> Option<ValueId> {
        match self {
            Self::Infinite => None,
            Self::Open(id) | Self::Closed(id) => Some(id),
        }
    }

    /// Whether the end is included.
    pub fn is_closed(self) -> bool {
        matches!(self, Self::Closed(_))
    }
}

/// An interval whose ends are values of rate constant or setup.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Range {
    /// Lower end.
    pub lower: Bound,
    /// Upper end.
    pub upper: Bound,
}

impl Range {
    /// The range with every value replaced.
    pub(super) fn map(self, f: impl Fn(ValueId) -> ValueId) -> Self {
        let bound = |b: Bound| match b {
            Bound::Infinite => Bound::Infinite,
            Bound::Open(id) => Bound::Open(f(id)),
            Bound::Closed(id) => Bound::Closed(f(id)),
        };
        Self {
            lower: bound(self.lower),
            upper: bound(self.upper),
        }
    }
}

/// Something that must hold of the parameters.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Check {
    /// A parameter is finite and lies in its range.
    Range {
        /// The parameter.
        parameter: usize,
        /// Its range.
        range: Range,
    },
    /// A named assumption holds.
    Assumption {
        /// Its name.
        name: String,
        /// As the author wrote it.
        text: String,
        /// The comparison.
        compare: Comparison,
        /// Its left side.
        left: ValueId,
        /// Its right side.
        right: ValueId,
    },
    /// A state starts in its domain.
    Initial {
        /// The state's name.
        state: String,
        /// Its value at time 0.
        value: ValueId,
        /// Its domain.
        domain: Range,
    },
}

impl Check {
    /// The values the check reads.
    pub fn operands(&self) -> Vec<ValueId> {
        let ends = |range: &Range| {
            [range.lower, range.upper]
                .into_iter()
                .filter_map(Bound::value)
        };
        match self {
            Self::Range { range, .. } => ends(range).collect(),
            Self::Assumption { left, right, .. } => vec![*left, *right],
            Self::Initial { value, domain, .. } => {
                std::iter::once(*value).chain(ends(domain)).collect()
            }
        }
    }

    /// The check with every value replaced.
    pub(super) fn map(self, f: impl Fn(ValueId) -> ValueId) -> Self {
        match self {
            Self::Range {
                parameter,
                range: r,
            } => Self::Range {
                parameter,
                range: r.map(f),
            },
            Self::Assumption {
                name,
                text,
                compare,
                left,
                right,
            } => Self::Assumption {
                name,
                text,
                compare,
                left: f(left),
                right: f(right),
            },
            Self::Initial {
                state,
                value,
                domain,
            } => Self::Initial {
                state,
                value: f(value),
                domain: domain.map(f),
            },
        }
    }
}
