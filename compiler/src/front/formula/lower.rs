//! Tree to [`Expr`]: names get their meaning, and what has no value is refused.

use std::collections::BTreeSet;

use super::ast::{Ast, AstKind, Factor, Term};
use super::functions::{other_name, outside_domain};
use super::parser::parse;
use crate::diagnostic::{Code, Diagnostic};
use crate::front::suggest::did_you_mean;
use crate::front::text::MappedText;
use crate::source::Span;
use crate::symbolic::{Expr, Function, Pool, Rational};

/// What names mean where a formula stands.
pub trait Names {
    /// The meaning of a name; none where its own definition was refused already, so that nothing more
    /// is said.
    ///
    /// # Errors
    /// The name does not exist, or may not be used here.
    fn value(&self, name: &str, span: Span) -> Result<Option<Expr>, Diagnostic>;

    /// What kind of thing a name is ("state"), for a message about a call of it.
    fn kind(&self, name: &str) -> Option<&'static str>;
}

/// Turns a tree into a formula of the pool. Each name that cannot be used is reported once.
///
/// # Errors
/// Every error found; an empty list where only a name's own definition is at fault.
pub fn lower(pool: &Pool, ast: &Ast, names: &dyn Names) -> Result<Expr, Vec<Diagnostic>> {
    let mut lowering = Lowering {
        pool,
        names,
        reported: BTreeSet::new(),
        errors: Vec::new(),
    };
    let result = lowering.formula(ast);
    match result {
        Some(expr) if lowering.errors.is_empty() => Ok(expr),
        _ => Err(lowering.errors),
    }
}

/// Reads a formula whose names are symbols of the pool; what the pool prints comes back as it was.
///
/// # Errors
/// As [`parse`] and [`lower`].
///
/// ```
/// use driftwright::front::formula::parse_in_pool;
/// use driftwright::symbolic::{Pool, SymbolKind};
/// let pool = Pool::new();
/// pool.symbol("x", SymbolKind::State);
/// let twice = parse_in_pool(&pool, "x + x").unwrap();
/// assert_eq!(pool.format(twice), "2*x");
/// ```
pub fn parse_in_pool(pool: &Pool, text: &str) -> Result<Expr, Vec<Diagnostic>> {
    let ast = parse(&MappedText::plain(text, 0))?;
    lower(pool, &ast, &PoolNames(pool))
}

struct PoolNames<'a>(&'a Pool);

impl Names for PoolNames<'_> {
    fn value(&self, name: &str, span: Span) -> Result<Option<Expr>, Diagnostic> {
        match self.0.find_symbol(name) {
            Some(symbol) => Ok(Some(self.0.var(symbol))),
            None if name == "pi" => Ok(Some(self.0.pi())),
            None => {
                let message = format!("`{name}` is not declared");
                Err(Diagnostic::error(Code::UnknownName, span, message))
            }
        }
    }

    fn kind(&self, name: &str) -> Option<&'static str> {
        self.0.find_symbol(name).map(|_| "symbol")
    }
}

struct Lowering<'a> {
    pool: &'a Pool,
    names: &'a dyn Names,
    reported: BTreeSet<String>,
    errors: Vec<Diagnostic>,
}

impl Lowering<'_> {
    fn formula(&mut self, ast: &Ast) -> Option<Expr> {
        match &ast.kind {
            AstKind::Number(value) => Some(self.pool.number(value.clone())),
            AstKind::Name(name) => self.name(name, ast.span),
            AstKind::Call {
                name,
                name_span,
                arguments,
            } => self.call(ast, name, *name_span, arguments),
            AstKind::Sum(terms) => self.sum(terms),
            AstKind::Product(factors) => self.product(factors),
            AstKind::Negate(inner) => self.formula(inner).map(|e| self.pool.neg(e)),
            AstKind::Power(base, exponent) => self.power(ast.span, base, exponent),
        }
    }

    fn name(&mut self, name: &str, span: Span) -> Option<Expr> {
        match self.names.value(name, span) {
            Ok(value) => value,
            Err(diagnostic) => {
                if self.reported.insert(name.to_owned()) {
                    self.errors.push(diagnostic);
                }
                None
            }
        }
    }

    /// All of the parts are looked at before one that failed stops the whole.
    fn sum(&mut self, terms: &[Term]) -> Option<Expr> {
        let parts: Vec<Option<Expr>> = terms
            .iter()
            .map(|term| {
                let value = self.formula(&term.value)?;
                Some(if term.negative {
                    self.pool.neg(value)
                } else {
                    value
                })
            })
            .collect();
        let parts: Option<Vec<Expr>> = parts.into_iter().collect();
        Some(self.pool.sum(parts?))
    }

    fn product(&mut self, factors: &[Factor]) -> Option<Expr> {
        let parts: Vec<Option<Expr>> = factors.iter().map(|factor| self.factor(factor)).collect();
        let parts: Option<Vec<Expr>> = parts.into_iter().collect();
        Some(self.pool.product(parts?))
    }

    fn factor(&mut self, factor: &Factor) -> Option<Expr> {
        let value = self.formula(&factor.value)?;
        if !factor.inverse {
            return Some(value);
        }
        if self.pool.is_zero_literal(value) {
            let message = "division by zero";
            let span = factor.operator.to(factor.value.span);
            return self.undefined(
                span,
                message,
                "the divisor is 0 whatever the model's values are",
            );
        }
        Some(self.pool.pow(value, self.pool.int(-1)))
    }

    fn power(&mut self, span: Span, base: &Ast, exponent: &Ast) -> Option<Expr> {
        let parts = (self.formula(base), self.formula(exponent));
        let (Some(b), Some(e)) = parts else {
            return None;
        };
        if let (Some(b), Some(e)) = (self.pool.as_number(b), self.pool.as_number(e)) {
            if b.is_zero() && e < Rational::ZERO {
                return self.undefined(span, "0 to a negative power has no value", "the base is 0");
            }
            if b < Rational::ZERO && !e.is_int() {
                let hint =
                    "a negative base takes only a whole exponent; `cbrt` is the real cube root";
                return self.undefined(span, "a root of a negative number has no real value", hint);
            }
        }
        Some(self.pool.pow(b, e))
    }

    fn call(&mut self, ast: &Ast, name: &str, name_span: Span, arguments: &[Ast]) -> Option<Expr> {
        let Some(function) = Function::from_name(name) else {
            let diagnostic = self.not_a_function(name, name_span);
            if self.reported.insert(format!("{name}(")) {
                self.errors.push(diagnostic);
            }
            for argument in arguments {
                self.formula(argument);
            }
            return None;
        };
        if arguments.len() != function.arity() {
            let (wanted, given) = (function.arity(), arguments.len());
            let plural = if wanted == 1 { "argument" } else { "arguments" };
            let message = format!("`{name}` takes {wanted} {plural}, not {given}");
            let hint = match function {
                Function::Min | Function::Max if given > 2 => {
                    format!("nest the calls: `{name}(a, {name}(b, c))`")
                }
                _ if given < wanted => format!("write `{name}(a, b)`"),
                Function::Log if given == 2 => {
                    "the logarithm to the base b is `log(x)/log(b)`".to_owned()
                }
                _ => format!("write `{name}(x)`; decimals have a point, not a comma"),
            };
            self.errors
                .push(Diagnostic::error(Code::ArgumentCount, ast.span, message).hint(hint));
            return None;
        }
        let values: Vec<Option<Expr>> = arguments.iter().map(|a| self.formula(a)).collect();
        let values = values.into_iter().collect::<Option<Vec<Expr>>>()?;
        let number = self.pool.as_number(values[0]);
        if let Some(domain) = number.and_then(|value| outside_domain(function, value)) {
            let message = format!("`{name}` has no real value here");
            return self.undefined(
                ast.span,
                &message,
                &format!("its argument must be {domain}"),
            );
        }
        Some(self.pool.call(function, &values))
    }

    fn undefined(&mut self, span: Span, message: &str, hint: &str) -> Option<Expr> {
        self.errors
            .push(Diagnostic::error(Code::Undefined, span, message).hint(hint));
        None
    }

    fn not_a_function(&self, name: &str, span: Span) -> Diagnostic {
        if let Some(kind) = self.names.kind(name) {
            let message = format!("`{name}` is a {kind}, not a function");
            return Diagnostic::error(Code::NotAFunction, span, message)
                .hint(format!("write `{name}*(...)` for a product"));
        }
        let message = format!("there is no function `{name}`");
        let diagnostic = Diagnostic::error(Code::NotAFunction, span, message);
        let known = Function::ALL.into_iter().map(Function::name);
        let hint = other_name(name).or_else(|| did_you_mean(name, known));
        diagnostic
            .hint(hint.unwrap_or_else(|| "`check --explain DW0206` lists the functions".to_owned()))
    }
}
