//! Units: optional; where an author declares them, every formula is held against them.
//!
//! A unit is a product of opaque symbols to rational powers. What is not declared is an unknown,
//! solved from the formulas it stands in, never taken for a pure number. The rules:
//!
//! - terms of a sum, both sides of an assumption or claim, ends of ranges and initial values have one
//!   dimension; a drift is the state's per unit of time, a diffusion per its square root, a
//!   correlation a pure number;
//! - arguments of `exp`, `sin`, `normal_cdf` and their like, and exponents, are pure numbers;
//! - `log` takes any quantity and is the logarithm of its number in its unit, as in the log of a price;
//!   `exp` leads back, so that its value may stand for a quantity, as a number written out may;
//! - nothing is said of a formula without a declared unit in it: `sin(2*pi*t)` is in order.

mod check;
mod dimension;
mod infer;
mod known;
#[cfg(test)]
mod tests;
mod text;
mod unknowns;

use std::collections::BTreeMap;

use super::formula::Ast;
use super::raw::RawModel;
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::source::Span;
use dimension::{Atom, Dimension};
use infer::Measure;
use unknowns::Unknowns;

/// A name of the file.
struct Known {
    measure: Measure,
    /// Where its unit is declared, or, without one, its name.
    place: Span,
    /// Whether a declared unit enters it.
    concerned: bool,
}

/// What the checks of one file share.
struct Checker<'a> {
    unknowns: Unknowns,
    time: Dimension,
    known: BTreeMap<&'a str, Known>,
    diagnostics: &'a mut Diagnostics,
}

/// Checks the units of a file. Without a declared unit of a quantity there is nothing to check.
pub(super) fn check(raw: &RawModel, diagnostics: &mut Diagnostics) {
    let mut checker = Checker {
        unknowns: Unknowns::default(),
        time: Dimension::one(),
        known: BTreeMap::new(),
        diagnostics,
    };
    if checker.declare(raw) {
        checker.formulas(raw);
    }
}

/// Names of which a mismatch says where their unit comes from.
const ORIGINS: usize = 4;

impl Checker<'_> {
    /// Whether a declared unit enters one of the formulas.
    fn concerns(&self, formulas: &[&Ast]) -> bool {
        let names = formulas.iter().flat_map(|ast| ast.names());
        names
            .filter_map(|(name, _)| self.known.get(name))
            .any(|known| known.concerned || self.is_settled(&known.measure))
    }

    /// Whether formulas gave a quantity without a declared unit one that is not of time alone.
    fn is_settled(&self, measure: &Measure) -> bool {
        let Measure::Quantity(dimension) = measure else {
            return false;
        };
        let of_time = |unit: &Atom| self.time.atoms().any(|(atom, _)| atom == unit);
        let resolved = self.unknowns.resolve(dimension);
        let mut atoms = resolved.atoms().map(|(atom, _)| atom);
        atoms.any(|atom| matches!(atom, Atom::Unit(_)) && !of_time(atom))
    }

    /// Pushes a mismatch, with the places its dimensions come from.
    fn report(&mut self, mut diagnostic: Diagnostic, formulas: &[&Ast]) {
        let mut names: Vec<&str> = Vec::new();
        for (name, _) in formulas.iter().flat_map(|ast| ast.names()) {
            if !names.contains(&name) && self.known.contains_key(name) {
                names.push(name);
            }
        }
        for name in names.into_iter().take(ORIGINS) {
            let Some(known) = self.known.get(name) else {
                continue;
            };
            let Measure::Quantity(dimension) = &known.measure else {
                continue;
            };
            let shown = self.unknowns.show(dimension);
            let (place, text) = match self.unknowns.solved_at(dimension) {
                Some(place) => (place, format!("by this `{name}` is {shown}")),
                None => (known.place, format!("`{name}` is {shown}")),
            };
            if diagnostic.labels.iter().all(|label| label.span != place) {
                diagnostic = diagnostic.label(place, text);
            }
        }
        self.diagnostics.push(diagnostic);
    }

    /// Reports a unit that cannot be read.
    fn unreadable(&mut self, text: &str, span: Span) {
        let message = format!("the unit `{text}` cannot be read, it is not checked");
        self.diagnostics.push(
            Diagnostic::warning(Code::UnreadableUnit, span, message)
                .hint("write products and powers of names, such as EUR/t, with fractions in parentheses: 1/year^(1/2)"),
        );
    }
}
