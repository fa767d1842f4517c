//! Claims and their verdicts.

use super::document::{Align, Equation, Inline, Mark, Table, Term, Text, code, prose, words};
use super::{Derivation, Document, trace};
use crate::analysis::claims::{ClaimResult, Verdict};
use crate::model::{Claim, ClaimKind, Formula, Model};
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
pub fn statement(model: &Model, claim: &Claim) -> Text {
    let is = |what: &str, of: &Formula, is: &Formula| {
        let (what, of) = (Inline::Words(format!("{what} of ")), written(of));
        vec![what, of, Inline::Words(" is ".into()), written(is)]
    };
    match &claim.kind {
        ClaimKind::DriftOf { of, is: claimed } => is("drift", of, claimed),
        ClaimKind::DiffusionOf { of, is } => {
            let mut text = vec![Inline::Words("diffusion of ".into()), written(of)];
            text.push(Inline::Words(" is ".into()));
            for (i, (j, f)) in is.iter().enumerate() {
                if i > 0 {
                    text.push(Inline::Words(" + ".into()));
                }
                text.push(written(f));
                text.push(Inline::Words(format!(" d{}", model.drivers[*j].name)));
            }
            if is.is_empty() {
                text.push(Inline::Written("0".into()));
            }
            text
        }
        ClaimKind::Martingale { of } => {
            vec![written(of), Inline::Words(" is a martingale".into())]
        }
        ClaimKind::MeanOf { of, is: claimed } => is("mean", of, claimed),
        ClaimKind::VarianceOf { of, is: claimed } => is("variance", of, claimed),
        ClaimKind::CovarianceOf { of: [x, y], is } => vec![
            Inline::Words("covariance of ".into()),
            written(x),
            Inline::Words(" and ".into()),
            written(y),
            Inline::Words(" is ".into()),
            written(is),
        ],
        ClaimKind::LawOf { of, is } => vec![
            Inline::Words("law of ".into()),
            written(of),
            Inline::Words(format!(" is {}", is.0)),
        ],
    }
}

fn written(formula: &Formula) -> Inline {
    Inline::Written(formula.text.clone())
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
            statement(model, claim),
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
        let mut head = vec![Inline::Code(claim.name.clone()), Inline::Words(": ".into())];
        head.extend(statement(model, claim));
        document.part(head);
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
