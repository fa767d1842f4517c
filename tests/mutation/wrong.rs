//! What may be wrong with an expression.

use quote::quote;
use syn::{BinOp, Expr, Lit, UnOp, parse_quote};

/// Whether an expression names a budget: the strictness of a comparison with it decides nothing.
fn is_budget(expr: &Expr) -> bool {
    let text = quote!(#expr).to_string();
    text.contains("MAX_") || text.contains(". amount ()")
}

/// A wrong version of an expression, and what is wrong with it.
pub(crate) fn wrong(expr: &Expr) -> Option<(String, Expr)> {
    match expr {
        Expr::Binary(binary) => {
            let chained =
                |e: &Expr| matches!(e, Expr::Let(_)) || quote!(#e).to_string().contains("let ");
            if chained(&binary.left) || chained(&binary.right) {
                return None;
            }
            let strictness = matches!(
                binary.op,
                BinOp::Lt(_) | BinOp::Le(_) | BinOp::Gt(_) | BinOp::Ge(_)
            );
            if strictness && (is_budget(&binary.left) || is_budget(&binary.right)) {
                return None;
            }
            let op = other_operator(&binary.op)?;
            let what = format!("{} instead of {}", spelled(&op), spelled(&binary.op));
            let (left, right) = (&binary.left, &binary.right);
            Some((what, parse_quote!(#left #op #right)))
        }
        Expr::Unary(unary) => {
            let what = match unary.op {
                UnOp::Not(_) => "not negated",
                UnOp::Neg(_) => "sign lost",
                _ => return None,
            };
            let inner = &unary.expr;
            Some((what.to_owned(), parse_quote!(#inner)))
        }
        Expr::Lit(literal) => {
            let Lit::Int(number) = &literal.lit else {
                return None;
            };
            let value: u128 = number.base10_parse().ok()?;
            let wrong =
                syn::LitInt::new(&format!("{}{}", value + 1, number.suffix()), number.span());
            Some((format!("{wrong} instead of {number}"), parse_quote!(#wrong)))
        }
        Expr::MethodCall(call) => {
            let name = call.method.to_string();
            let other = other_method(&name)?;
            let mut wrong = call.clone();
            wrong.method = syn::Ident::new(other, call.method.span());
            Some((
                format!("{other} instead of {name}"),
                Expr::MethodCall(wrong),
            ))
        }
        _ => None,
    }
}

fn spelled(op: &BinOp) -> String {
    quote!(#op).to_string()
}

fn other_operator(op: &BinOp) -> Option<BinOp> {
    Some(match op {
        BinOp::Add(_) => parse_quote!(-),
        BinOp::Sub(_) => parse_quote!(+),
        BinOp::Mul(_) => parse_quote!(/),
        BinOp::Div(_) => parse_quote!(*),
        BinOp::Rem(_) => parse_quote!(/),
        BinOp::And(_) => parse_quote!(||),
        BinOp::Or(_) => parse_quote!(&&),
        BinOp::Eq(_) => parse_quote!(!=),
        BinOp::Ne(_) => parse_quote!(==),
        BinOp::Lt(_) => parse_quote!(<=),
        BinOp::Le(_) => parse_quote!(<),
        BinOp::Gt(_) => parse_quote!(>=),
        BinOp::Ge(_) => parse_quote!(>),
        BinOp::AddAssign(_) => parse_quote!(-=),
        BinOp::SubAssign(_) => parse_quote!(+=),
        BinOp::MulAssign(_) => parse_quote!(/=),
        BinOp::DivAssign(_) => parse_quote!(*=),
        _ => return None,
    })
}

/// The operations of the algebra and of the standard library that are taken for one another.
fn other_method(name: &str) -> Option<&'static str> {
    const PAIRS: [(&str, &str); 9] = [
        ("add", "sub"),
        ("mul", "div"),
        ("min", "max"),
        ("any", "all"),
        ("is_some", "is_none"),
        ("is_positive", "is_negative"),
        ("is_non_negative", "is_non_positive"),
        ("first", "last"),
        ("lower", "upper"),
    ];
    PAIRS.iter().find_map(|&(a, b)| match name {
        _ if name == a => Some(b),
        _ if name == b => Some(a),
        _ => None,
    })
}
