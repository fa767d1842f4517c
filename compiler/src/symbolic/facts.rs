//! Facts about symbols that algebra may use: ranges, and the signs that follow.

use super::node::Expr;

/// One end of an [`Interval`].
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub enum Bound {
    /// No end on this side.
    Infinite,
    /// An end that does not belong to the interval.
    Open(Expr),
    /// An end that belongs to the interval.
    Closed(Expr),
}

impl Bound {
    /// The formula of a finite end.
    pub fn value(self) -> Option<Expr> {
        match self {
            Bound::Infinite => None,
            Bound::Open(e) | Bound::Closed(e) => Some(e),
        }
    }
}

/// An interval whose ends are formulas in parameters.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub struct Interval {
    /// The lower end.
    pub lower: Bound,
    /// The upper end.
    pub upper: Bound,
}

impl Interval {
    /// The whole line.
    pub const REAL: Interval = Interval {
        lower: Bound::Infinite,
        upper: Bound::Infinite,
    };

    /// The interval in its notation, `(0, inf)` or `[a, b)`, its ends as `text` writes them.
    pub fn notation(&self, text: impl Fn(Expr) -> String) -> String {
        let end = |end: &Bound, infinite: &str| end.value().map_or(infinite.to_owned(), &text);
        let is_closed = |end: &Bound| matches!(end, Bound::Closed(_));
        let open = if is_closed(&self.lower) { '[' } else { '(' };
        let close = if is_closed(&self.upper) { ']' } else { ')' };
        let (lower, upper) = (end(&self.lower, "-inf"), end(&self.upper, "inf"));
        format!("{open}{lower}, {upper}{close}")
    }
}

/// What is known of the sign of a formula everywhere in the ranges of its symbols.
#[derive(Clone, Copy, PartialEq, Eq, Hash, Debug)]
pub enum Sign {
    /// Greater than zero.
    Positive,
    /// Zero or greater.
    NonNegative,
    /// Zero.
    Zero,
    /// Zero or less.
    NonPositive,
    /// Less than zero.
    Negative,
    /// Nothing is known.
    Unknown,
}

impl Sign {
    /// Greater than zero, for certain.
    pub fn is_positive(self) -> bool {
        self == Sign::Positive
    }

    /// Zero or greater, for certain.
    pub fn is_non_negative(self) -> bool {
        matches!(self, Sign::Positive | Sign::NonNegative | Sign::Zero)
    }
}
