//! Why a formula cannot go on where it breaks.

use super::lexer::Kind;
use super::parser::Parser;
use crate::diagnostic::{Code, Diagnostic};

impl Parser {
    /// Why the formula cannot go on at the present token.
    pub(super) fn unexpected(&self) -> Diagnostic {
        let token = self.peek();
        let previous = self.previous();
        let ends_operand = previous.is_some_and(|before| {
            matches!(
                before.kind,
                Kind::Number(_) | Kind::Name(_) | Kind::Sign(")")
            )
        });
        let error = |code, message: String| Diagnostic::error(code, token.span, message);
        match &token.kind {
            Kind::End => {
                let span = previous.map_or(token.span, |before| before.span);
                Diagnostic::error(Code::FormulaSyntax, span, "the formula breaks off here")
                    .hint("something must follow")
            }
            Kind::Sign("[" | "]") => error(
                Code::ReservedSyntax,
                "square brackets are kept for indexed families".to_owned(),
            )
            .hint("group with round parentheses"),
            Kind::Sign(")") if !ends_operand => error(
                Code::FormulaSyntax,
                "something is missing before `)`".to_owned(),
            )
            .hint("add what belongs there, or remove the parentheses"),
            Kind::Sign(")") => error(
                Code::UnbalancedParentheses,
                "this `)` closes nothing".to_owned(),
            )
            .hint("remove it, or add the `(` it belongs to"),
            Kind::Sign("*") if previous.is_some_and(|b| b.kind == Kind::Sign("*")) => {
                error(Code::FormulaSyntax, "`**` is not an operator".to_owned())
                    .hint("powers are written with `^`")
            }
            Kind::Sign(sign @ ("<" | "<=" | ">" | ">=")) => error(
                Code::FormulaSyntax,
                format!("`{sign}` has no place in this formula"),
            )
            .hint("inequalities belong in `[assumptions]`; `max` and `min` cut values"),
            Kind::Sign(",") => error(
                Code::FormulaSyntax,
                "a comma separates arguments of a function only".to_owned(),
            )
            .hint("decimals are written with a point"),
            Kind::Sign(sign) => error(Code::FormulaSyntax, format!("`{sign}` cannot stand here"))
                .hint("a number, a name or `(` must come first"),
            Kind::Number(_) | Kind::Name(_) => error(
                Code::FormulaSyntax,
                "an operator is missing before this".to_owned(),
            )
            .hint("products are written with `*`"),
        }
    }
}
