//! Claims and their verdicts.

use super::document::{Align, Equation, Inline, Mark, Table, Term, Text, code, prose, words};
use super::{Derivation, Document, trace};
use crate::analysis::claims::{ClaimResult, Verdict};
use crate::model::{Claim, ClaimKind, Model};
use crate::symbolic::trace::Trace;
use crate::symbolic::{Pool, Witness};

/// A verdict as a marked word.
pub fn verdict_mark(verdict: Verdict) -> Inline {
    let mark = match verdict {
        Verdict::Proved => Mark::Good,
        Verdict::Refuted => Mark::Bad,
        Verdict::Open => Mark::Open,
    };
    Inline::Marked(mark, verdict.name().to_owned())
}

/// What a claim says, as the author wrote it.
pub fn statement(model: &Model, claim: &Claim) -> String {
    match &claim.kind {
        ClaimKind::DriftOf { of, is } => format!("drift of {} is {}", of.text, is.text),
        ClaimKind::DiffusionOf { of, is } => {
            let parts: Vec<String> = is
                .iter()
                .map(|(j, f)| format!("{} d{}", f.text, model.drivers[*j].name))
                .collect();
            let parts = if parts.is_empty() {
                "0".to_owned()
            } else {
                parts.join(" + ")
            };
            format!("diffusion of {} is {parts}", of.text)
        }
        ClaimKind::Martingale { of } => format!("{} is a martingale", of.text),
        ClaimKind::MeanOf { of, is } => format!("mean of {} is {}", of.text, is.text),
        ClaimKind::VarianceOf { of, is } => format!("variance of {} is {}", of.text, is.text),
        ClaimKind::CovarianceOf { of: [x, y], is } => {
            format!("covariance of {} and {} is {}", x.text, y.text, is.text)
        }
        ClaimKind::LawOf { of, is } => format!("law of {} is {}", of.text, is.0),
    }
}

/// One row a claim: name, statement, verdict.
pub fn claim_table(model: &Model, results: &[ClaimResult]) -> Table {
    let mut table = Table::new([
        ("claim", Align::Left),
        ("says", Align::Left),
        ("verdict", Align::Left),
    ]);
    for (claim, result) in model.claims.iter().zip(results) {
        table.row([
            code(&claim.name),
            words(statement(model, claim)),
            vec![verdict_mark(result.verdict)],
        ]);
    }
    table
}

/// The section on claims.
pub(super) fn claims(document: &mut Document, derivation: &Derivation<'_>) {
    let model = derivation.model;
    if model.claims.is_empty() {
        return;
    }
    document.section("Claims");
    for (claim, result) in model.claims.iter().zip(derivation.claims) {
        document.part(vec![
            Inline::Code(claim.name.clone()),
            Inline::Words(": ".into()),
            Inline::Words(statement(model, claim)),
        ]);
        let mut verdict: Text = vec![verdict_mark(result.verdict)];
        if result.local == Some(Verdict::Proved) && result.verdict == Verdict::Open {
            verdict.push(Inline::Words(" (a local martingale: proved)".into()));
        }
        if !result.reason.is_empty() {
            verdict.extend(prose(&format!(": {}", result.reason)));
        }
        document.list(vec![verdict]);
        document.equations(trace::equations(&working(derivation, claim, result)));
        if result.verdict == Verdict::Refuted {
            document.equations(sides(result));
            if let Some(witness) = &result.witness {
                document.list(vec![words(at(&model.pool, witness))]);
            }
        }
    }
}

/// The working of a verdict. Where Ito's rule was applied to a quantity that was derived above, what
/// stands there is not repeated.
fn working(derivation: &Derivation<'_>, claim: &Claim, result: &ClaimResult) -> Trace {
    let of = match &claim.kind {
        ClaimKind::DriftOf { of, .. }
        | ClaimKind::DiffusionOf { of, .. }
        | ClaimKind::Martingale { of } => of.expr,
        _ => return result.trace.clone(),
    };
    let derived = derivation.dynamics.derived.iter().find(|d| d.formula == of);
    let known = derived.map_or(&[][..], |d| &d.trace.steps);
    let own = result
        .trace
        .steps
        .iter()
        .filter(|step| !known.contains(step));
    Trace {
        steps: own.cloned().collect(),
    }
}

fn sides(result: &ClaimResult) -> Vec<Equation> {
    [
        ("derived", result.derived),
        ("claimed", result.claimed),
        ("difference", result.difference),
    ]
    .into_iter()
    .filter_map(|(name, side)| {
        side.map(|e| Equation::new(vec![Term::Symbol(name.into())], vec![Term::Formula(e)]))
    })
    .collect()
}

/// Where two sides differ, in words.
fn at(pool: &Pool, witness: &Witness) -> String {
    let point: Vec<String> = witness
        .point
        .iter()
        .map(|(s, v)| format!("{} = {v}", pool.symbol_name(*s)))
        .collect();
    format!(
        "At {}: derived {}, claimed {}.",
        point.join(", "),
        witness.left,
        witness.right
    )
}
