//! Interval notation with formulas as ends: `(0, inf)`, `[lower, 2*upper]`.

use super::ast::Ast;
use super::lexer::Kind;
use super::parser::{Parsed, Parser};
use crate::diagnostic::{Code, Diagnostic};
use crate::front::text::MappedText;
use crate::source::Span;

/// An interval as written.
#[derive(Clone, Debug)]
pub struct IntervalAst {
    /// The lower end.
    pub lower: IntervalEnd,
    /// The upper end.
    pub upper: IntervalEnd,
    /// The whole interval.
    pub span: Span,
}

/// An end of an interval.
#[derive(Clone, Debug)]
pub enum IntervalEnd {
    /// `-inf` below, `inf` above.
    Infinite,
    /// Left out: a parenthesis.
    Open(Ast),
    /// Kept in: a bracket.
    Closed(Ast),
}

/// Parses an interval.
///
/// # Errors
/// What is not an interval, with the notation in the hint.
pub fn parse_interval(text: &MappedText) -> Result<IntervalAst, Vec<Diagnostic>> {
    let mut parser = Parser::new(text)?;
    parser.interval(text.span()).map_err(|d| vec![d])
}

impl Parser {
    fn interval(&mut self, span: Span) -> Parsed<IntervalAst> {
        let Some((open, open_span)) = self.take(&["(", "["]) else {
            return Err(bad(span, "an interval starts with `(` or `[`"));
        };
        let lower = self.bound()?;
        if self.take(&[","]).is_none() {
            return Err(self.instead_of("`,` between the ends"));
        }
        let upper = self.bound()?;
        let Some((close, close_span)) = self.take(&[")", "]"]) else {
            return Err(self.instead_of("`)` or `]`"));
        };
        self.end()
            .map_err(|d| bad(d.span, "the interval has ended before this"))?;
        Ok(IntervalAst {
            lower: end(lower, open == "[", "-inf", open_span)?,
            upper: end(upper, close == "]", "inf", close_span)?,
            span: open_span.to(close_span),
        })
    }

    /// A formula, or the spelling of an infinite end and its place.
    fn bound(&mut self) -> Parsed<Bound> {
        let from = self.position();
        let sign = self.take(&["-", "+"]);
        let token = self.peek().clone();
        if token.kind == Kind::Name("inf".to_owned()) {
            self.bump();
            let span = sign.map_or(token.span, |(_, s)| s.to(token.span));
            let spelling = if matches!(sign, Some(("-", _))) {
                "-inf"
            } else {
                "inf"
            };
            return Ok(Bound::Infinite(spelling, span));
        }
        self.rewind(from);
        self.sum().map(Bound::Formula)
    }

    fn instead_of(&self, wanted: &str) -> Diagnostic {
        bad(self.peek().span, &format!("{wanted} is missing here"))
    }
}

enum Bound {
    Infinite(&'static str, Span),
    Formula(Ast),
}

fn end(bound: Bound, closed: bool, infinity: &str, bracket: Span) -> Parsed<IntervalEnd> {
    match bound {
        Bound::Formula(formula) if closed => Ok(IntervalEnd::Closed(formula)),
        Bound::Formula(formula) => Ok(IntervalEnd::Open(formula)),
        Bound::Infinite(spelling, span) if spelling != infinity => {
            Err(bad(span, &format!("`{spelling}` is on the wrong side")))
        }
        Bound::Infinite(..) if closed => Err(bad(bracket, "an infinite end cannot be kept in")),
        Bound::Infinite(..) => Ok(IntervalEnd::Infinite),
    }
}

fn bad(span: Span, message: &str) -> Diagnostic {
    Diagnostic::error(Code::BadInterval, span, message).hint(
        "write an interval such as \"(0, inf)\" or \"[0, 1]\": a parenthesis leaves the end out, a \
         bracket keeps it in",
    )
}
