//! The diagnostics for refuted claims and for claims that say nothing.

use super::ClaimResult;
use crate::diagnostic::{Code, Diagnostic};
use crate::model::{Claim, ClaimKind, Formula, Model};
use crate::source::Span;
use crate::symbolic::{SymbolKind, Witness};

/// An error at what is claimed, with both sides, the difference and a point where they differ.
pub(super) fn refutation(model: &Model, claim: &Claim, result: &ClaimResult) -> Diagnostic {
    let pool = &model.pool;
    let message = format!("claim `{}` is wrong: {}", claim.name, result.reason);
    let mut diagnostic = Diagnostic::error(Code::ClaimRefuted, place(claim), message)
        .hint("mend the claim, or the model if the claim is what was meant");
    let Some(difference) = result.difference else {
        return diagnostic;
    };
    if let (Some(derived), Some(claimed)) = (result.derived, result.claimed) {
        diagnostic = diagnostic
            .note(format!("derived: {}", pool.format(derived)))
            .note(format!("claimed: {}", pool.format(claimed)));
        if claimed != pool.zero() {
            diagnostic = diagnostic.note(format!("difference: {}", pool.format(difference)));
        }
    }
    match &result.witness {
        Some(witness) => diagnostic.note(describe(model, witness)),
        None => diagnostic,
    }
}

/// A warning of a claim about a formula that no state enters: it holds whatever the model is.
pub(super) fn says_nothing(model: &Model, claim: &Claim) -> Option<Diagnostic> {
    let fixed = |f: &&Formula| {
        let simple = model.pool.simplify(f.expr);
        !model.pool.depends_on_kind(simple, SymbolKind::State)
    };
    let of = subjects(&claim.kind).into_iter().find(fixed)?;
    let message = format!("claim `{}` says nothing about the model", claim.name);
    Some(
        Diagnostic::warning(Code::EmptyClaim, of.span, message)
            .label(of.span, "no state enters this")
            .note("it would hold whatever drifts and diffusions are")
            .hint("name a state, or a quantity that depends on one"),
    )
}

/// What a claim is about.
fn subjects(kind: &ClaimKind) -> Vec<&Formula> {
    match kind {
        ClaimKind::DriftOf { of, .. }
        | ClaimKind::DiffusionOf { of, .. }
        | ClaimKind::Martingale { of }
        | ClaimKind::MeanOf { of, .. }
        | ClaimKind::VarianceOf { of, .. }
        | ClaimKind::LawOf { of, .. } => vec![of],
        ClaimKind::CovarianceOf { of, .. } => of.iter().collect(),
    }
}

/// `at mu = 0.5, sigma = 2: derived -1.5, claimed 0.5`.
fn describe(model: &Model, witness: &Witness) -> String {
    let values: Vec<String> = witness
        .point
        .iter()
        .map(|&(symbol, value)| format!("{} = {}", model.pool.symbol_name(symbol), short(value)))
        .collect();
    let place = match values.as_slice() {
        [] => "everywhere".to_owned(),
        _ => format!("at {}", values.join(", ")),
    };
    format!(
        "{place}: derived {}, claimed {}",
        short(witness.left),
        short(witness.right)
    )
}

/// A number with six significant digits, without trailing zeros.
fn short(value: f64) -> String {
    if value == 0.0 || !value.is_finite() {
        return format!("{value}");
    }
    let magnitude = value.abs().log10().floor() as i32;
    if !(-4..9).contains(&magnitude) {
        return format!("{value:.5e}");
    }
    let digits = (5 - magnitude).max(0) as usize;
    let text = format!("{value:.digits$}");
    if text.contains('.') {
        text.trim_end_matches('0').trim_end_matches('.').to_owned()
    } else {
        text
    }
}

/// What the author claims: the right-hand side where there is one.
fn place(claim: &Claim) -> Span {
    match &claim.kind {
        ClaimKind::DriftOf { is, .. }
        | ClaimKind::MeanOf { is, .. }
        | ClaimKind::VarianceOf { is, .. }
        | ClaimKind::CovarianceOf { is, .. } => is.span,
        ClaimKind::LawOf { is, .. } => is.1,
        ClaimKind::Martingale { of } => of.span,
        ClaimKind::DiffusionOf { is, .. } => is.first().map_or(claim.span, |(_, f)| f.span),
    }
}
