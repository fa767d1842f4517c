//! The dimension of a formula, from the leaves up.

use super::Checker;
use super::dimension::Dimension;
use crate::diagnostic::{Code, Diagnostic};
use crate::front::formula::{Ast, AstKind, Factor, Term};
use crate::symbolic::{Function, Rational};

/// What a formula measures.
#[derive(Clone, Debug)]
pub(super) enum Measure {
    /// A number that may stand for any dimension when added or compared, and is a pure number in
    /// products: made of numbers alone, or an exponential (which undoes the logarithm of the number a
    /// quantity is in its unit).
    Number,
    /// A quantity.
    Quantity(Dimension),
}

impl Measure {
    /// As a factor.
    pub(super) fn dimension(&self) -> Dimension {
        match self {
            Self::Number => Dimension::one(),
            Self::Quantity(dimension) => dimension.clone(),
        }
    }

    fn map(self, change: impl FnOnce(Dimension) -> Dimension) -> Self {
        match self {
            Self::Number => Self::Number,
            Self::Quantity(dimension) => Self::Quantity(change(dimension)),
        }
    }
}

/// Whole numbers up to this one are pure numbers in products, as in `sigma^2/2`. Other literals may
/// stand for a quantity, as the rate in `0.3*(4 - X)`, and take the dimension that fits.
const LARGEST_PURE: i64 = 10;

impl Checker<'_> {
    /// The measure of a formula. What does not fit is reported, and taken as unknown from there on.
    pub(super) fn infer(&mut self, ast: &Ast) -> Measure {
        match &ast.kind {
            AstKind::Number(_) => Measure::Number,
            AstKind::Name(name) => self.name(name),
            AstKind::Negate(inner) => self.infer(inner),
            AstKind::Sum(terms) => {
                self.alike(&terms.iter().map(|t| &t.value).collect::<Vec<_>>(), "added")
            }
            AstKind::Product(factors) => self.product(factors),
            AstKind::Power(base, exponent) => self.power(base, exponent),
            AstKind::Call {
                name, arguments, ..
            } => self.call(name, arguments),
        }
    }

    fn name(&mut self, name: &str) -> Measure {
        match name {
            "pi" => Measure::Number,
            "t" => Measure::Quantity(self.time.clone()),
            _ => match self.known.get(name) {
                Some(known) => known.measure.clone(),
                None => Measure::Quantity(self.unknowns.fresh(None)),
            },
        }
    }

    /// Parts that must have one dimension: terms, arguments of `min` and `max`.
    fn alike(&mut self, parts: &[&Ast], done: &str) -> Measure {
        let mut first: Option<(&Ast, Dimension)> = None;
        let mut failed = false;
        for part in parts {
            let Measure::Quantity(dimension) = self.infer(part) else {
                continue;
            };
            let Some((other, expected)) = &first else {
                first = Some((part, dimension));
                continue;
            };
            if self.unknowns.equate(&dimension, expected, part.span) {
                continue;
            }
            let (other, expected) = (*other, expected.clone());
            if !failed && self.concerns(&[part, other]) {
                self.report_unlike(part, &dimension, other, &expected, done);
            }
            failed = true;
        }
        match first {
            None => Measure::Number,
            Some(_) if failed => Measure::Quantity(self.unknowns.fresh(None)),
            Some((_, dimension)) => Measure::Quantity(self.unknowns.resolve(&dimension)),
        }
    }

    fn report_unlike(
        &mut self,
        part: &Ast,
        dimension: &Dimension,
        other: &Ast,
        expected: &Dimension,
        done: &str,
    ) {
        let (this, that) = (self.unknowns.show(dimension), self.unknowns.show(expected));
        let message = format!("{this} and {that} cannot be {done}");
        let diagnostic = Diagnostic::error(Code::UnitMismatch, part.span, message)
            .label(part.span, format!("this is {this}"))
            .label(other.span, format!("this is {that}"))
            .hint("look for a missing factor, or mend the units declared");
        self.report(diagnostic, &[part, other]);
    }

    fn product(&mut self, factors: &[Factor]) -> Measure {
        let measures: Vec<Measure> = factors.iter().map(|f| self.infer(&f.value)).collect();
        if measures.iter().all(|m| matches!(m, Measure::Number)) {
            return Measure::Number;
        }
        let mut result = Dimension::one();
        for (factor, measure) in factors.iter().zip(&measures) {
            let sign = if factor.inverse {
                -Rational::ONE
            } else {
                Rational::ONE
            };
            match &factor.value.kind {
                AstKind::Number(value) if !is_pure(value) => {
                    result.multiply(&self.unknowns.fresh(None), &sign);
                }
                _ => result.multiply(&measure.dimension(), &sign),
            }
        }
        Measure::Quantity(self.unknowns.resolve(&result))
    }

    fn power(&mut self, base: &Ast, exponent: &Ast) -> Measure {
        let measure = self.infer(base);
        if let Some(value) = constant(exponent) {
            return measure.map(|dimension| dimension.power(&value));
        }
        self.pure(exponent, "an exponent");
        // The dimension depends on the exponent's value, as in `sigma*S^beta`.
        let resolved = measure.map(|dimension| self.unknowns.resolve(&dimension));
        match resolved {
            Measure::Quantity(dimension) if !dimension.is_one() => {
                Measure::Quantity(self.unknowns.fresh(None))
            }
            other => other,
        }
    }

    fn call(&mut self, name: &str, arguments: &[Ast]) -> Measure {
        let parts: Vec<&Ast> = arguments.iter().collect();
        let (Some(function), [first, ..]) = (Function::from_name(name), &parts[..]) else {
            return Measure::Quantity(self.unknowns.fresh(None));
        };
        let root = |degree: u8| Rational::from_parts(1.into(), degree.into());
        match function {
            Function::Min | Function::Max => self.alike(&parts, "compared"),
            Function::Abs => self.infer(first),
            Function::Sqrt => self.infer(first).map(|dimension| dimension.power(&root(2))),
            Function::Cbrt => self.infer(first).map(|dimension| dimension.power(&root(3))),
            // Of the number that the quantity is in its unit.
            Function::Log | Function::Sign => self.infer(first).map(|_| Dimension::one()),
            Function::Exp => {
                self.pure(first, "the argument of `exp`");
                Measure::Number
            }
            _ => self
                .pure(first, &format!("the argument of `{name}`"))
                .map(|_| Dimension::one()),
        }
    }

    /// A formula that must be a pure number.
    fn pure(&mut self, ast: &Ast, what: &str) -> Measure {
        let measure = self.infer(ast);
        if let Measure::Quantity(dimension) = &measure
            && !self.unknowns.equate(dimension, &Dimension::one(), ast.span)
            && self.concerns(&[ast])
        {
            let shown = self.unknowns.show(dimension);
            let message = format!("{what} must be a pure number, this is {shown}");
            let diagnostic = Diagnostic::error(Code::UnitOfArgument, ast.span, message)
                .label(ast.span, format!("this is {shown}"))
                .hint("divide by a quantity of the same unit, or multiply by a rate");
            self.report(diagnostic, &[ast]);
        }
        measure
    }
}

fn is_pure(value: &Rational) -> bool {
    value.is_int() && *value <= Rational::from(LARGEST_PURE)
}

/// The value of an exponent made of numbers alone.
fn constant(ast: &Ast) -> Option<Rational> {
    Some(match &ast.kind {
        AstKind::Number(value) => value.clone(),
        AstKind::Negate(inner) => -constant(inner)?,
        AstKind::Sum(terms) => {
            let signed = |term: &Term| {
                let value = constant(&term.value)?;
                Some(if term.negative { -value } else { value })
            };
            let terms: Option<Vec<Rational>> = terms.iter().map(signed).collect();
            terms?
                .into_iter()
                .fold(Rational::ZERO, |sum, term| sum + term)
        }
        AstKind::Product(factors) => {
            let mut result = Rational::ONE;
            for factor in factors {
                let value = constant(&factor.value)?;
                if !factor.inverse {
                    result *= value;
                } else if value == Rational::ZERO {
                    return None;
                } else {
                    result /= value;
                }
            }
            result
        }
        AstKind::Name(_) | AstKind::Call { .. } | AstKind::Power(..) => return None,
    })
}
