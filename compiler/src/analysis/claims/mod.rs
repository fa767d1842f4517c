//! Claims: what the author derived on paper, held against what the compiler derives.
//!
//! Each claim is proved, refuted or left open. *Proved* rests on the normal form for all admissible
//! parameters, default values never enter; *refuted* on a point inside ranges, domains and assumptions
//! at which the two sides differ, or on a theorem that is named; everything else is *open* and is put
//! to the test by simulation. A refuted claim is an error of the model file.

mod compare;
mod law;
mod local;
mod martingale;
mod moment;
mod report;

use super::moments::Moments;
use crate::calculus::{Dynamics, System};
use crate::diagnostic::Diagnostics;
use crate::model::{Claim, ClaimKind, Formula, Model};
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Witness};
use compare::{Comparison, compare};

/// What became of a claim.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Verdict {
    /// It holds for all admissible parameters.
    Proved,
    /// It does not hold.
    Refuted,
    /// Neither was shown.
    Open,
}

impl Verdict {
    /// `proved`, `refuted` or `open`, as in JSON.
    pub fn name(self) -> &'static str {
        match self {
            Self::Proved => "proved",
            Self::Refuted => "refuted",
            Self::Open => "open",
        }
    }
}

/// A claim with its verdict and the evidence.
#[derive(Clone, Debug)]
pub struct ClaimResult {
    /// Its name.
    pub name: String,
    /// Its kind as in the model file: `drift_of`, `martingale`, ...
    pub kind: &'static str,
    /// The verdict.
    pub verdict: Verdict,
    /// Why, in a sentence or two.
    pub reason: String,
    /// What the compiler found.
    pub derived: Option<Expr>,
    /// What the author claims.
    pub claimed: Option<Expr>,
    /// Derived minus claimed, simplified, where they differ or may differ.
    pub difference: Option<Expr>,
    /// A point at which they differ: left is the derived value, right the claimed one.
    pub witness: Option<Witness>,
    /// For martingales: whether the drift is zero, so that it is one locally.
    pub local: Option<Verdict>,
    /// The working.
    pub trace: Trace,
}

/// What the judges of the single kinds need.
struct Court<'a> {
    model: &'a Model,
    dynamics: &'a Dynamics,
    moments: &'a Moments,
    system: System<'a>,
}

/// Judges every claim of a model, in the file's order. Each refuted one also becomes an error with
/// both sides, the difference and a witness, each empty one a warning.
pub fn judge(
    model: &Model,
    dynamics: &Dynamics,
    moments: &Moments,
    diagnostics: &mut Diagnostics,
) -> Vec<ClaimResult> {
    let system = System::of(model, dynamics);
    let court = Court {
        model,
        dynamics,
        moments,
        system,
    };
    let judged = model.claims.iter().map(|claim| {
        let mut result = court.judge(claim);
        if result.verdict == Verdict::Open {
            let exceeded = model.pool.exceeded();
            result
                .reason
                .extend(exceeded.iter().map(|limit| format!("; budget of {limit}")));
        }
        let finding = match result.verdict {
            Verdict::Refuted => Some(report::refutation(model, claim, &result)),
            Verdict::Proved | Verdict::Open => report::says_nothing(model, claim),
        };
        finding
            .into_iter()
            .for_each(|finding| diagnostics.push(finding));
        result
    });
    judged.collect()
}

impl Court<'_> {
    fn judge(&self, claim: &Claim) -> ClaimResult {
        match &claim.kind {
            ClaimKind::DriftOf { of, is } => self.drift(claim, of, is),
            ClaimKind::DiffusionOf { of, is } => self.diffusion(claim, of, is),
            ClaimKind::Martingale { of } => self.martingale(claim, of),
            ClaimKind::MeanOf { of, is } => self.mean(claim, of, is),
            ClaimKind::VarianceOf { of, is } => self.variance(claim, of, is),
            ClaimKind::CovarianceOf { of, is } => self.covariance(claim, of, is),
            ClaimKind::LawOf { of, is } => self.law(claim, of, &is.0),
        }
    }

    /// A result that only has a verdict and a reason so far.
    fn result(&self, claim: &Claim, verdict: Verdict, reason: impl Into<String>) -> ClaimResult {
        ClaimResult {
            name: claim.name.clone(),
            kind: kind_name(&claim.kind),
            verdict,
            reason: reason.into(),
            derived: None,
            claimed: None,
            difference: None,
            witness: None,
            local: None,
            trace: Trace::new(),
        }
    }

    /// Holds what was derived against what is claimed; `what` names it in the reason.
    fn settle(
        &self,
        claim: &Claim,
        what: &str,
        derived: Expr,
        claimed: Expr,
        trace: Trace,
    ) -> ClaimResult {
        let pool = &self.model.pool;
        let (verdict, ending, witness) = match compare(self.model, derived, claimed) {
            Comparison::Equal => (Verdict::Proved, "is what is claimed", None),
            Comparison::Different(w) => (Verdict::Refuted, "is not what is claimed", Some(w)),
            Comparison::Unknown => {
                let ending = "could be shown neither equal to what is claimed nor different";
                (Verdict::Open, ending, None)
            }
        };
        let mut result = self.result(claim, verdict, format!("{what} {ending}"));
        if verdict != Verdict::Proved {
            result.difference = Some(pool.simplify(pool.sub(derived, claimed)));
        }
        result.derived = Some(derived);
        result.claimed = Some(claimed);
        result.witness = witness;
        result.trace = trace;
        let note = format!("{what}: derived, and what is claimed");
        result.trace.push("claim", note, Some(derived), claimed);
        result
    }
}

/// The key of a kind of claim in a model file.
fn kind_name(kind: &ClaimKind) -> &'static str {
    match kind {
        ClaimKind::DriftOf { .. } => "drift_of",
        ClaimKind::DiffusionOf { .. } => "diffusion_of",
        ClaimKind::Martingale { .. } => "martingale",
        ClaimKind::MeanOf { .. } => "mean_of",
        ClaimKind::VarianceOf { .. } => "variance_of",
        ClaimKind::CovarianceOf { .. } => "covariance_of",
        ClaimKind::LawOf { .. } => "law_of",
    }
}

/// A formula in back quotes, as written, on one line.
fn quoted(formula: &Formula) -> String {
    let words: Vec<&str> = formula.text.split_whitespace().collect();
    format!("`{}`", words.join(" "))
}
