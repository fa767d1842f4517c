//! Spaces in formulas, as the printer writes them.

use crate::front::formula::{Token, TokenKind, tokens};
use crate::front::text::MappedText;

/// The formula with canonical spaces; none where it does not fall into tokens, or where two names or
/// numbers would run into one.
pub(super) fn spaced(text: &str) -> Option<String> {
    let tokens = tokens(&MappedText::plain(text, 0)).ok()?;
    let mut out = String::with_capacity(text.len());
    let mut after_operand = false;
    for Token { kind, span } in &tokens {
        let spelling = &text[span.start..span.end];
        let operand = match kind {
            TokenKind::End => break,
            TokenKind::Number(_) | TokenKind::Name(_) if after_operand => return None,
            TokenKind::Number(_) | TokenKind::Name(_) => true,
            TokenKind::Sign(sign) => matches!(*sign, ")" | "]"),
        };
        match spelling {
            "+" | "-" if after_operand => out.push_str(&format!(" {spelling} ")),
            "<" | "<=" | ">" | ">=" => out.push_str(&format!(" {spelling} ")),
            "," => out.push_str(", "),
            _ => out.push_str(spelling),
        }
        after_operand = operand;
    }
    Some(out)
}

#[cfg(test)]
mod tests {
    use super::spaced;

    #[test]
    fn spaces_are_those_of_the_printer() {
        let cases = [
            ("mu *S", "mu*S"),
            ("a+b -c", "a + b - c"),
            ("- a", "-a"),
            ("a* -b", "a*-b"),
            ("2^ - x", "2^-x"),
            ("max( S-40 ,0 )", "max(S - 40, 0)"),
            ("( 0 , inf )", "(0, inf)"),
            ("[-1,1]", "[-1, 1]"),
            ("(- inf, a+ -b]", "(-inf, a + -b]"),
            ("2*mu>=sigma ^2", "2*mu >= sigma^2"),
            ("1e-3*x", "1e-3*x"),
            ("σ * √x", "σ * √x"),
            ("(a)(b)", "(a)(b)"),
        ];
        for (written, expected) in cases {
            let text = spaced(written);
            assert_eq!(text.as_deref().unwrap_or(written), expected);
        }
        assert_eq!(spaced("a b"), None);
    }
}
