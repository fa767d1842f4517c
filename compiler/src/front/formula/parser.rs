//! Tokens to tree: a precedence parser.
//!
//! ```text
//! sum      = product (("+" | "-") product)*
//! product  = unary (("*" | "/") unary)*
//! unary    = ("-" | "+") unary | power
//! power    = primary ("^" exponent)?
//! exponent = ("-" | "+") exponent | power
//! primary  = number | name | name "(" sum ("," sum)* ")" | "(" sum ")"
//! ```

use super::ast::{Ast, AstKind, Factor, Term};
use super::lexer::{Kind, Token, tokens};
use crate::diagnostic::{Code, Diagnostic};
use crate::front::text::MappedText;
use crate::model::Relation;
use crate::source::Span;
use crate::symbolic::Function;

/// Levels to which parentheses, calls, powers and signs may nest.
pub const MAX_DEPTH: usize = 200;

/// Parses a formula.
///
/// # Errors
/// Bad characters, or the first place where the formula cannot go on.
pub fn parse(text: &MappedText) -> Result<Ast, Vec<Diagnostic>> {
    let mut parser = Parser::new(text)?;
    let formula = parser.sum();
    formula
        .and_then(|ast| parser.end().map(|()| ast))
        .map_err(|d| vec![d])
}

/// Parses `left relation right`.
///
/// # Errors
/// As [`parse`]; a second relation or none is refused.
pub fn parse_inequality(text: &MappedText) -> Result<(Ast, Relation, Ast), Vec<Diagnostic>> {
    Parser::new(text)?.inequality().map_err(|d| vec![d])
}

pub(super) struct Parser {
    tokens: Vec<Token>,
    at: usize,
    depth: usize,
}

pub(super) type Parsed<T> = Result<T, Diagnostic>;

impl Parser {
    pub(super) fn new(text: &MappedText) -> Result<Self, Vec<Diagnostic>> {
        let tokens = tokens(text)?;
        if tokens.len() == 1 {
            let span = text.span();
            return Err(vec![
                Diagnostic::error(Code::FormulaSyntax, span, "the formula is empty")
                    .hint("write a formula, or leave the key out where it is optional"),
            ]);
        }
        Ok(Self {
            tokens,
            at: 0,
            depth: 0,
        })
    }

    pub(super) fn peek(&self) -> &Token {
        &self.tokens[self.at]
    }

    /// Takes the token; the end stays.
    pub(super) fn bump(&mut self) -> Token {
        let token = self.tokens[self.at].clone();
        self.at = (self.at + 1).min(self.tokens.len() - 1);
        token
    }

    /// The token before the present one.
    pub(super) fn previous(&self) -> Option<&Token> {
        self.at.checked_sub(1).map(|before| &self.tokens[before])
    }

    pub(super) fn position(&self) -> usize {
        self.at
    }

    pub(super) fn rewind(&mut self, to: usize) {
        self.at = to;
    }

    pub(super) fn take(&mut self, signs: &[&'static str]) -> Option<(&'static str, Span)> {
        match *self.peek() {
            Token {
                kind: Kind::Sign(sign),
                span,
            } if signs.contains(&sign) => {
                self.bump();
                Some((sign, span))
            }
            _ => None,
        }
    }

    pub(super) fn end(&self) -> Parsed<()> {
        match self.peek().kind {
            Kind::End => Ok(()),
            _ => Err(self.unexpected()),
        }
    }

    fn inequality(&mut self) -> Parsed<(Ast, Relation, Ast)> {
        let left = self.sum()?;
        let relation = match self.take(&["<", "<=", ">", ">="]) {
            Some(("<", _)) => Relation::Less,
            Some(("<=", _)) => Relation::LessEqual,
            Some((">", _)) => Relation::Greater,
            Some(_) => Relation::GreaterEqual,
            None => {
                self.end()?;
                let message = "an assumption compares two formulas";
                return Err(Diagnostic::error(Code::BadAssumption, left.span, message)
                    .hint("write an inequality with <, <=, > or >="));
            }
        };
        let right = self.sum()?;
        if let Some((_, span)) = self.take(&["<", "<=", ">", ">="]) {
            let message = "an assumption has one relation only";
            return Err(Diagnostic::error(Code::BadAssumption, span, message)
                .hint("write two assumptions, one an inequality"));
        }
        self.end().map(|()| (left, relation, right))
    }

    pub(super) fn sum(&mut self) -> Parsed<Ast> {
        let first = self.product()?;
        let mut terms = Vec::new();
        while let Some((sign, _)) = self.take(&["+", "-"]) {
            terms.push(Term {
                negative: sign == "-",
                value: self.product()?,
            });
        }
        let Some(last) = terms.last() else {
            return Ok(first);
        };
        let span = first.span.to(last.value.span);
        terms.insert(
            0,
            Term {
                negative: false,
                value: first,
            },
        );
        Ok(Ast::new(AstKind::Sum(terms), span))
    }

    fn product(&mut self) -> Parsed<Ast> {
        let first = self.unary()?;
        let mut factors = Vec::new();
        while let Some((sign, operator)) = self.take(&["*", "/"]) {
            let value = self.unary()?;
            factors.push(Factor {
                inverse: sign == "/",
                operator,
                value,
            });
        }
        let Some(last) = factors.last() else {
            return Ok(first);
        };
        let span = first.span.to(last.value.span);
        factors.insert(
            0,
            Factor {
                inverse: false,
                operator: first.span,
                value: first,
            },
        );
        Ok(Ast::new(AstKind::Product(factors), span))
    }

    fn unary(&mut self) -> Parsed<Ast> {
        self.signed(Self::unary, Self::power)
    }

    fn exponent(&mut self) -> Parsed<Ast> {
        self.signed(Self::exponent, Self::power)
    }

    /// A sign and what `again` reads, or what `plain` reads.
    fn signed(
        &mut self,
        again: fn(&mut Self) -> Parsed<Ast>,
        plain: fn(&mut Self) -> Parsed<Ast>,
    ) -> Parsed<Ast> {
        let Some((sign, span)) = self.take(&["-", "+"]) else {
            return plain(self);
        };
        let inner = self.nested(span, again)?;
        if sign == "+" {
            return Ok(inner);
        }
        let span = span.to(inner.span);
        Ok(Ast::new(AstKind::Negate(Box::new(inner)), span))
    }

    fn power(&mut self) -> Parsed<Ast> {
        let base = self.primary()?;
        let Some((_, span)) = self.take(&["^"]) else {
            return Ok(base);
        };
        let exponent = self.nested(span, Self::exponent)?;
        let span = base.span.to(exponent.span);
        Ok(Ast::new(
            AstKind::Power(Box::new(base), Box::new(exponent)),
            span,
        ))
    }

    fn primary(&mut self) -> Parsed<Ast> {
        let token = self.peek().clone();
        match token.kind {
            Kind::Number(value) => {
                self.bump();
                Ok(Ast::new(AstKind::Number(value), token.span))
            }
            Kind::Name(name) => {
                self.bump();
                self.name(name, token.span)
            }
            Kind::Sign("(") => {
                self.bump();
                let inner = self.nested(token.span, Self::sum)?;
                let close = self.close(token.span)?;
                Ok(Ast::new(inner.kind, token.span.to(close)))
            }
            _ => Err(self.unexpected()),
        }
    }

    fn name(&mut self, name: String, span: Span) -> Parsed<Ast> {
        let Some((_, open)) = self.take(&["("]) else {
            if Function::from_name(&name).is_some() {
                let message = format!("the function `{name}` has no argument");
                return Err(Diagnostic::error(Code::NotAFunction, span, message)
                    .hint(format!("write `{name}(...)`")));
            }
            return Ok(Ast::new(AstKind::Name(name), span));
        };
        if let Some((_, close)) = self.take(&[")"]) {
            let message = format!("`{name}` is called without an argument");
            return Err(
                Diagnostic::error(Code::ArgumentCount, span.to(close), message)
                    .hint("put the argument between the parentheses"),
            );
        }
        let mut arguments = vec![self.nested(open, Self::sum)?];
        while self.take(&[","]).is_some() {
            arguments.push(self.nested(open, Self::sum)?);
        }
        let close = self.close(open)?;
        let kind = AstKind::Call {
            name,
            name_span: span,
            arguments,
        };
        Ok(Ast::new(kind, span.to(close)))
    }

    /// Goes one level deeper.
    fn nested(&mut self, span: Span, inner: fn(&mut Self) -> Parsed<Ast>) -> Parsed<Ast> {
        if self.depth == MAX_DEPTH {
            let message = format!("the formula nests more than {MAX_DEPTH} levels deep");
            return Err(Diagnostic::error(Code::NestedTooDeep, span, message)
                .hint("name the inner parts in `[where]`"));
        }
        self.depth += 1;
        let result = inner(self);
        self.depth -= 1;
        result
    }

    fn close(&mut self, open: Span) -> Parsed<Span> {
        if let Some((_, span)) = self.take(&[")"]) {
            return Ok(span);
        }
        if self.peek().kind == Kind::End {
            let message = "the parenthesis is not closed";
            return Err(
                Diagnostic::error(Code::UnbalancedParentheses, open, message)
                    .hint("add the missing `)`"),
            );
        }
        Err(self.unexpected())
    }
}
