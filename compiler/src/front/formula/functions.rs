//! What is particular to single functions: other names, domains, kinks.

use super::ast::{Ast, AstKind};
use crate::source::Span;
use crate::symbolic::{Function, Rational};

/// Functions by the names other languages give them.
pub(super) fn other_name(name: &str) -> Option<String> {
    let text = match name {
        "ln" => "`log` is the natural logarithm",
        "log10" => "write `log(x)/log(10)`",
        "log2" => "write `log(x)/log(2)`",
        "log1p" => "write `log(1 + x)`",
        "expm1" => "write `exp(x) - 1`",
        "pow" => "powers are written `x^y`",
        "fabs" => "write `abs(x)`",
        "arcsin" => "write `asin(x)`",
        "arccos" => "write `acos(x)`",
        "arctan" => "write `atan(x)`",
        "sgn" => "write `sign(x)`",
        "erfc" => "write `1 - erf(x)`",
        "Phi" | "norm_cdf" => "write `normal_cdf(x)`",
        _ => return None,
    };
    Some(text.to_owned())
}

/// The domain of a function, where a number given to it lies outside.
pub(super) fn outside_domain(function: Function, value: Rational) -> Option<&'static str> {
    let (zero, one) = (Rational::ZERO, Rational::ONE);
    let within = -one.clone()..=one.clone();
    match function {
        Function::Log if value <= zero => Some("positive"),
        Function::Sqrt if value < zero => Some("0 or positive"),
        Function::Asin | Function::Acos if !within.contains(&value) => Some("between -1 and 1"),
        Function::Acosh if value < one => Some("1 or more"),
        Function::Atanh if value <= -one.clone() || value >= one => {
            Some("strictly between -1 and 1")
        }
        Function::NormalQuantile if value <= zero || value >= one => {
            Some("strictly between 0 and 1")
        }
        _ => None,
    }
}

/// The first function with a kink, and where its name stands.
pub(crate) fn kink_at(ast: &Ast) -> Option<(Function, Span)> {
    let mut found = None;
    ast.walk(&mut |node| {
        if let AstKind::Call {
            name, name_span, ..
        } = &node.kind
            && let Some(function) = Function::from_name(name)
            && !function.is_smooth()
        {
            found.get_or_insert((function, *name_span));
        }
    });
    found
}
