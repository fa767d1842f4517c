//! Parameters and their ranges.

use super::super::raw::RawParameter;
use super::Resolver;
use super::intervals::{ends, show};
use super::order::{Definition, order};
use super::place::Place;
use crate::diagnostic::{Code, Diagnostic};
use crate::model::Parameter;
use crate::symbolic::{Interval, SymbolKind};

impl Resolver<'_> {
    /// Parameters with their ranges, which the pool learns too.
    pub(super) fn parameters(&mut self, raw: &[RawParameter]) -> Vec<Parameter> {
        for parameter in raw {
            if let Some((value, _)) = &parameter.value {
                let symbol = self
                    .pool
                    .symbol(&parameter.name.text, SymbolKind::Parameter);
                self.numbers.set(symbol, value);
            }
        }
        self.range_circles(raw);
        raw.iter()
            .map(|parameter| self.parameter(parameter))
            .collect()
    }

    /// Ranges whose ends depend on one another say nothing.
    fn range_circles(&mut self, raw: &[RawParameter]) {
        let definitions: Vec<Definition<'_>> = raw
            .iter()
            .map(|p| Definition {
                name: &p.name.text,
                uses: p
                    .range
                    .iter()
                    .flat_map(ends)
                    .flat_map(|ast| ast.names())
                    .collect(),
            })
            .collect();
        order(&definitions, self.diagnostics);
    }

    fn parameter(&mut self, raw: &RawParameter) -> Parameter {
        let symbol = self.pool.symbol(&raw.name.text, SymbolKind::Parameter);
        let range = raw
            .range
            .as_ref()
            .map_or(Interval::REAL, |ast| self.interval(ast, Place::Range));
        self.pool.set_range(symbol, range);
        if let Some((value, span)) = &raw.value
            && self
                .numbers
                .outside(self.pool.number(value.clone()), &range)
                .is_some()
        {
            let message = format!(
                "the default value of `{}` is outside its range {}",
                raw.name.text,
                show(self, &range)
            );
            let mut diagnostic = Diagnostic::error(Code::ValueOutsideRange, *span, message)
                .hint("change the value or the range");
            if let Some(ast) = &raw.range {
                diagnostic = diagnostic.label(ast.span, "the range");
            }
            self.diagnostics.push(diagnostic);
        }
        Parameter {
            name: raw.name.text.clone(),
            symbol,
            value: raw.value.as_ref().map(|(value, _)| value.clone()),
            unit: raw.unit.as_ref().map(|unit| unit.text.clone()),
            about: raw.about.clone(),
            range,
            span: raw.name.span,
        }
    }
}
