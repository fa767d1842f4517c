//! Sub-expressions, derived quantities and readouts.

use super::super::raw::RawNamed;
use super::Resolver;
use super::order::{Definition, order};
use super::place::Place;
use super::scope::Kind;
use crate::model::Named;

impl Resolver<'_> {
    /// The definitions of one kind, in the order of the file; they may use one another in any order,
    /// readouts excepted, which nothing but claims may use.
    pub(super) fn definitions(&mut self, raw: &[RawNamed], kind: Kind) -> Vec<Named> {
        let place = match kind {
            Kind::Where => Place::Where,
            Kind::Derived => Place::Derived,
            _ => Place::Readout,
        };
        let mut formulas = vec![None; raw.len()];
        let definitions: Vec<Definition<'_>> = raw
            .iter()
            .map(|named| Definition {
                name: &named.name.text,
                uses: named
                    .formula
                    .iter()
                    .flat_map(|formula| formula.ast.names())
                    .collect(),
            })
            .collect();
        let positions: Vec<usize> = if kind == Kind::Readout {
            (0..raw.len()).collect()
        } else {
            order(&definitions, self.diagnostics)
        };
        for position in positions {
            let Some(formula) = &raw[position].formula else {
                continue;
            };
            let formula = self.scope.formula(formula, place, self.diagnostics);
            formulas[position] = formula;
            if kind != Kind::Readout {
                self.define(
                    &raw[position],
                    kind,
                    formulas[position].as_ref().map(|f| f.expr),
                );
            }
        }
        if kind == Kind::Readout {
            for (named, formula) in raw.iter().zip(&formulas) {
                self.define(named, kind, formula.as_ref().map(|f| f.expr));
            }
        }
        let named = raw.iter().zip(formulas).map(|(raw, formula)| Named {
            name: raw.name.text.clone(),
            formula: formula.unwrap_or_else(|| self.stand_in()),
            about: raw.about.clone(),
            unit: raw.unit.as_ref().map(|unit| unit.text.clone()),
            span: raw.name.span,
        });
        named.collect()
    }

    fn define(&mut self, raw: &RawNamed, kind: Kind, value: Option<crate::symbolic::Expr>) {
        self.scope.define(kind, &raw.name.text, value);
    }
}
