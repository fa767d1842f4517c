//! `[parameters]`, `[assumptions]` and `[correlation]`.

use dashu_int::IBig;

use super::declared::declared;
use super::fields::{Fields, as_table, formula_of, keep, string};
use super::{Name, RawAssumption, RawCorrelation, RawParameter, keys};
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::front::formula::{self, NumberError, decimal};
use crate::front::names::composed;
use crate::front::tree::{Entry, Value, ValueKind};
use crate::symbolic::Rational;

/// `[parameters]`
pub(super) fn read(root: &mut Fields<'_, '_>) -> Vec<RawParameter> {
    let entries = root.entries("parameters").into_iter();
    entries
        .map(|entry| parameter(entry, root.diagnostics))
        .collect()
}

fn parameter(entry: &Entry, diagnostics: &mut Diagnostics) -> RawParameter {
    let name = declared(entry, true, diagnostics);
    let mut parameter = RawParameter {
        name,
        value: None,
        unit: None,
        about: None,
        range: None,
    };
    match &entry.value.kind {
        ValueKind::Table(table) => {
            let mut fields = Fields::new(table, "a parameter", keys::PARAMETER, diagnostics);
            parameter.value = fields.get("value").and_then(|e| {
                number(&e.value, fields.diagnostics).map(|value| (value, e.value.span))
            });
            parameter.unit = fields.placed_text("unit");
            parameter.about = fields.text("about");
            parameter.range = fields.interval("range");
        }
        _ => {
            let value = number(&entry.value, diagnostics);
            parameter.value = value.map(|value| (value, entry.value.span));
        }
    }
    parameter
}

/// A default value, exactly as written.
fn number(value: &Value, diagnostics: &mut Diagnostics) -> Option<Rational> {
    let error = |code, message: String| Diagnostic::error(code, value.span, message);
    let result = match &value.kind {
        ValueKind::Integer(digits, radix) if *radix != 10 => IBig::from_str_radix(digits, *radix)
            .map(Rational::from)
            .map_err(|_| NumberError::Malformed),
        ValueKind::Integer(digits, _) | ValueKind::Float(digits) => signed(digits),
        _ => {
            let message = format!("a default value is a number, not {}", value.describe());
            let hint =
                "write a number such as 0.05; formulas of other parameters go into `[where]`";
            diagnostics.push(error(Code::WrongType, message).hint(hint));
            return None;
        }
    };
    let diagnostic = match result {
        Ok(number) => return Some(number),
        Err(NumberError::Malformed) => error(
            Code::BadNumber,
            "a default value is a finite number".to_owned(),
        )
        .hint("leave the value out if the caller must give one"),
        Err(NumberError::TooLong) => error(
            Code::BadNumber,
            "the number has more than 1000 digits".to_owned(),
        )
        .hint("a double precision number holds 17"),
        Err(NumberError::OutOfRange) => error(
            Code::BadNumber,
            "the number does not fit double precision".to_owned(),
        )
        .hint("change the unit"),
    };
    diagnostics.push(diagnostic);
    None
}

fn signed(digits: &str) -> Result<Rational, NumberError> {
    match digits.strip_prefix('-') {
        Some(rest) => decimal(rest).map(|value| -value),
        None => decimal(digits.strip_prefix('+').unwrap_or(digits)),
    }
}

/// `[assumptions]`
pub(super) fn assumptions(root: &mut Fields<'_, '_>) -> Vec<RawAssumption> {
    let entries = root.entries("assumptions").into_iter();
    entries
        .filter_map(|entry| assumption(entry, root.diagnostics))
        .collect()
}

fn assumption(entry: &Entry, diagnostics: &mut Diagnostics) -> Option<RawAssumption> {
    let name = declared(entry, false, diagnostics);
    let text = string(&entry.value, "an assumption", diagnostics)?;
    let (left, relation, right) = keep(formula::parse_inequality(text), diagnostics)?;
    let (span, text) = (text.span(), text.text().trim().to_owned());
    Some(RawAssumption {
        name,
        left,
        relation,
        right,
        text,
        span,
    })
}

/// `[correlation]`: `W.B = "rho"`
pub(super) fn correlations(root: &mut Fields<'_, '_>) -> Vec<RawCorrelation> {
    let mut found = Vec::new();
    for first in root.entries("correlation") {
        if let ValueKind::String(_) = first.value.kind {
            let message = format!("`{}` names one driver, a correlation is of two", first.key);
            let hint = match first.key.split_once('.') {
                Some((one, other)) => format!("put no quotes around both: {one}.{other} = \"...\""),
                None => format!(
                    "write {}.B = \"...\" with the other driver's name",
                    first.key
                ),
            };
            root.diagnostics
                .push(Diagnostic::error(Code::CorrelationPair, first.key_span, message).hint(hint));
            continue;
        }
        let Some(table) = as_table(&first.value, &first.key, root.diagnostics) else {
            continue;
        };
        for second in &table.entries {
            if let Some(formula) = formula_of(&second.value, "a correlation", root.diagnostics) {
                found.push(RawCorrelation {
                    drivers: [key_name(first), key_name(second)],
                    formula,
                });
            }
        }
    }
    // Pairs in the order of the file, however the dotted keys were grouped.
    found.sort_by_key(|correlation| correlation.formula.span);
    found
}

fn key_name(entry: &Entry) -> Name {
    Name {
        text: composed(&entry.key),
        span: entry.key_span,
    }
}
