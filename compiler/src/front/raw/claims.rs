//! `[claims]`.

use super::declared::declared;
use super::fields::{Fields, choice, formula_of, string, table_or};
use super::quantities::per_driver;
use super::{RawClaim, RawClaimKind, RawFormula, keys};
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::front::tree::{Entry, Value, ValueKind};

/// `[claims]`: a table a claim.
pub(super) fn read(root: &mut Fields<'_, '_>) -> Vec<RawClaim> {
    let entries = root.entries("claims").into_iter();
    entries
        .filter_map(|entry| claim(entry, root.diagnostics))
        .collect()
}

fn claim(entry: &Entry, diagnostics: &mut Diagnostics) -> Option<RawClaim> {
    let name = declared(entry, false, diagnostics);
    let hint = || {
        format!(
            "write {} = {{ mean_of = \"...\", is = \"...\" }}",
            entry.key
        )
    };
    let table = table_or(&entry.value, "a claim", hint, diagnostics)?;
    let mut fields = Fields::new(table, "a claim", keys::CLAIM, diagnostics).at(entry.key_span);
    let kinds = &keys::CLAIM[..keys::CLAIM.len() - 1];
    let given: Vec<(&str, &Entry)> = kinds
        .iter()
        .filter_map(|kind| Some((*kind, fields.get(kind)?)))
        .collect();
    let (key, subject) = match given[..] {
        [] => {
            // A misspelt key has been reported, and names the kind that was meant.
            if table.entries.iter().all(|e| e.key == "is") {
                let message = "the claim does not say what it is about";
                let diagnostic = Diagnostic::error(Code::MalformedClaim, entry.key_span, message);
                let hint = "give one of drift_of, diffusion_of, martingale, mean_of, variance_of, \
                            covariance_of, law_of";
                fields.diagnostics.push(diagnostic.hint(hint));
            }
            return None;
        }
        [subject] => subject,
        [(first, _), (second, entry), ..] => {
            let message = format!("a claim is of one kind, not `{first}` and `{second}`");
            let diagnostic = Diagnostic::error(Code::MalformedClaim, entry.key_span, message);
            fields
                .diagnostics
                .push(diagnostic.hint("make two claims of it"));
            return None;
        }
    };
    let kind = kind(&mut fields, key, subject)?;
    Some(RawClaim {
        name,
        kind,
        span: entry.key_span.to(entry.value.span),
    })
}

/// A claim of the kind `key`, which stands in the entry `subject`.
fn kind(fields: &mut Fields<'_, '_>, key: &str, subject: &Entry) -> Option<RawClaimKind> {
    if key == "martingale" {
        if let Some(is) = fields.get("is") {
            let message = "a martingale claim has no `is`";
            let diagnostic = Diagnostic::error(Code::MalformedClaim, is.key_span, message);
            fields
                .diagnostics
                .push(diagnostic.hint("remove it, or claim a mean with `mean_of`"));
        }
        let of = formula_of(&subject.value, "martingale", fields.diagnostics)?;
        return Some(RawClaimKind::Martingale { of });
    }
    if key == "covariance_of" {
        let of = pair(&subject.value, fields.diagnostics);
        let is = fields.required_formula("is");
        return Some(RawClaimKind::Covariance { of: of?, is: is? });
    }
    let of = formula_of(&subject.value, key, fields.diagnostics);
    Some(match key {
        "diffusion_of" => {
            let is = fields.required("is")?;
            let is = per_driver(&is.value, "is", fields.diagnostics)?;
            RawClaimKind::Diffusion { of: of?, is }
        }
        "law_of" => {
            let is = fields.required("is")?;
            let law = choice(&is.value, "law_of", keys::LAWS, fields.diagnostics)?;
            let span = string(&is.value, "is", fields.diagnostics)?.span();
            RawClaimKind::Law {
                of: of?,
                is: (keys::LAWS[law].to_owned(), span),
            }
        }
        other => {
            let is = fields.required_formula("is")?;
            let of = of?;
            match other {
                "drift_of" => RawClaimKind::Drift { of, is },
                "mean_of" => RawClaimKind::Mean { of, is },
                _ => RawClaimKind::Variance { of, is },
            }
        }
    })
}

/// The two formulas of a covariance.
fn pair(value: &Value, diagnostics: &mut Diagnostics) -> Option<[RawFormula; 2]> {
    if let ValueKind::Array(items) = &value.kind
        && let [first, second] = &items[..]
    {
        let first = formula_of(first, "covariance_of", diagnostics);
        let second = formula_of(second, "covariance_of", diagnostics);
        return Some([first?, second?]);
    }
    let message = "`covariance_of` is a list of two formulas";
    diagnostics.push(
        Diagnostic::error(Code::MalformedClaim, value.span, message)
            .hint("write covariance_of = [\"X\", \"Y\"]"),
    );
    None
}
