//! Formulas (section 2 of the language): text to tokens to a tree with spans to an [`Expr`].
//!
//! The tree keeps sums and products flat, so that a sum of 20,000 terms is not 20,000 levels deep;
//! what nests is bounded by [`MAX_DEPTH`], so that no input overflows the stack.
//!
//! [`Expr`]: crate::symbolic::Expr

mod ast;
mod functions;
mod interval;
mod lexer;
mod lower;
mod number;
mod parser;
mod unexpected;

pub use ast::{Ast, AstKind, Factor, Term};
pub(crate) use functions::kink_at;
pub use interval::{IntervalAst, IntervalEnd, parse_interval};
pub(crate) use lexer::{Kind as TokenKind, Token, is_name, tokens};
pub use lower::{Names, lower, parse_in_pool};
pub use number::{NumberError, decimal};
pub use parser::{MAX_DEPTH, parse, parse_inequality};

#[cfg(test)]
mod tests;
