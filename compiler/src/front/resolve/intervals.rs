//! Ranges of parameters and domains of states.

use super::super::formula::{IntervalAst, IntervalEnd};
use super::Resolver;
use super::numbers::{Basis, short};
use super::place::Place;
use crate::diagnostic::{Code, Diagnostic};
use crate::symbolic::{Bound, Interval};

impl Resolver<'_> {
    /// The interval with its ends resolved; the whole line where it is at fault.
    pub(super) fn interval(&mut self, ast: &IntervalAst, place: Place) -> Interval {
        let lower = self.bound(&ast.lower, place);
        let upper = self.bound(&ast.upper, place);
        let (Some(lower), Some(upper)) = (lower, upper) else {
            return Interval::REAL;
        };
        let interval = Interval { lower, upper };
        if self.ends_in_order(ast, interval) {
            interval
        } else {
            Interval::REAL
        }
    }

    fn bound(&mut self, end: &IntervalEnd, place: Place) -> Option<Bound> {
        Some(match end {
            IntervalEnd::Infinite => Bound::Infinite,
            IntervalEnd::Open(ast) => {
                Bound::Open(self.scope.lower(ast, place, self.diagnostics)?)
            }
            IntervalEnd::Closed(ast) => {
                Bound::Closed(self.scope.lower(ast, place, self.diagnostics)?)
            }
        })
    }

    /// The lower end must lie below the upper one, where numbers decide.
    fn ends_in_order(&mut self, ast: &IntervalAst, interval: Interval) -> bool {
        let (Some(lower), Some(upper)) = (interval.lower.value(), interval.upper.value()) else {
            return true;
        };
        let (Some((low, first)), Some((high, second))) =
            (self.numbers.value(lower), self.numbers.value(upper))
        else {
            return true;
        };
        if low < high && lower != upper {
            return true;
        }
        let literal = first == Basis::Literal && second == Basis::Literal || lower == upper;
        let (low, high) = (short(low), short(high));
        let diagnostic = if literal {
            let message = format!("the lower end {low} does not lie below the upper end {high}");
            Diagnostic::error(Code::BadInterval, ast.span, message)
        } else {
            let message =
                format!("at the default values the lower end is {low}, the upper end {high}");
            Diagnostic::warning(Code::BadInterval, ast.span, message)
        };
        self.diagnostics
            .push(diagnostic.hint("the lower end comes first and must be the smaller one"));
        !literal
    }
}

/// The trees of the ends.
pub(super) fn ends(ast: &IntervalAst) -> impl Iterator<Item = &super::super::formula::Ast> {
    [&ast.lower, &ast.upper]
        .into_iter()
        .filter_map(|end| match end {
            IntervalEnd::Infinite => None,
            IntervalEnd::Open(ast) | IntervalEnd::Closed(ast) => Some(ast),
        })
}

/// An interval as text.
pub(super) fn show(resolver: &Resolver<'_>, interval: &Interval) -> String {
    let format = |e| resolver.pool.format(e);
    let lower = match interval.lower {
        Bound::Infinite => "(-inf".to_owned(),
        Bound::Open(e) => format!("({}", format(e)),
        Bound::Closed(e) => format!("[{}", format(e)),
    };
    match interval.upper {
        Bound::Infinite => format!("{lower}, inf)"),
        Bound::Open(e) => format!("{lower}, {})", format(e)),
        Bound::Closed(e) => format!("{lower}, {}]", format(e)),
    }
}
