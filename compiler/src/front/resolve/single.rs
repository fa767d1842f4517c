//! One formula read against a finished model, as for `derive --of`.

use super::super::formula::parse;
use super::super::raw::RawFormula;
use super::super::text::MappedText;
use super::place::Place;
use super::scope::{Declared, Kind, Scope};
use crate::diagnostic::{Diagnostic, Diagnostics};
use crate::model::{Formula, Model};
use crate::source::{SourceFile, Span};
use crate::symbolic::Expr;

/// Reads a formula in the names of a model. Spans and diagnostics refer to `source`, whose whole text
/// is the formula.
///
/// # Errors
/// What is wrong with the formula at that place; [`Place::Derived`] refuses kinks.
pub fn read_formula(
    model: &Model,
    source: &SourceFile,
    place: Place,
) -> Result<Formula, Vec<Diagnostic>> {
    let text = MappedText::plain(source.text(), 0);
    let ast = parse(&text)?;
    let raw = RawFormula {
        ast,
        text: source.text().trim().to_owned(),
        span: text.span(),
    };
    let mut diagnostics = Diagnostics::new();
    let formula = scope_of(model).formula(&raw, place, &mut diagnostics);
    let errors = diagnostics.finish();
    match formula {
        Some(formula) if errors.is_empty() => Ok(formula),
        _ => Err(errors),
    }
}

fn scope_of(model: &Model) -> Scope {
    let mut scope = Scope::new(model.pool.clone());
    let mut add = |kind, name: &str, span: Span, value: Option<Expr>| {
        scope.insert(name, Declared { kind, span, value });
    };
    for driver in &model.drivers {
        add(Kind::Driver, &driver.name, driver.span, None);
    }
    for parameter in &model.parameters {
        add(
            Kind::Parameter,
            &parameter.name,
            parameter.span,
            Some(model.pool.var(parameter.symbol)),
        );
    }
    for state in &model.states {
        add(
            Kind::State,
            &state.name,
            state.span,
            Some(model.pool.var(state.symbol)),
        );
    }
    let named = [
        (Kind::Where, &model.wheres),
        (Kind::Derived, &model.derived),
        (Kind::Readout, &model.readouts),
    ];
    for (kind, list) in named {
        for named in list {
            add(kind, &named.name, named.span, Some(named.formula.expr));
        }
    }
    scope
}
