//! Claims about the law of a formula at one time.

use super::{ClaimResult, Court, Verdict, quoted};
use crate::analysis::moments::LawName;
use crate::model::{Claim, Formula};

impl Court<'_> {
    pub(super) fn law(&self, claim: &Claim, of: &Formula, claimed: &str) -> ClaimResult {
        let what = quoted(of);
        let Some(law) = self.moments.law(of.expr) else {
            return self.result(
                claim,
                Verdict::Open,
                format!("the law of {what} was not derived"),
            );
        };
        let found = format!("the law of {what} is {}", law.name());
        if law.name() == claimed {
            self.result(claim, Verdict::Proved, found)
        } else if claimed == LawName::TransformedNormal.name() && is_monotone_image(law) {
            let reason = format!("{found}, a monotone image of a normal law");
            self.result(claim, Verdict::Proved, reason)
        } else if own_image(law).is_some_and(|image| image.name() == claimed) {
            let reason = format!("{found}, which is its own monotone image");
            self.result(claim, Verdict::Proved, reason)
        } else if claimed == "joint_normal" {
            let reason = format!("{found}; a joint law is not a law of one formula");
            self.result(claim, Verdict::Open, reason)
        } else {
            self.result(claim, Verdict::Refuted, format!("{found}, not {claimed}"))
        }
    }
}

/// Whether the law is that of a strictly monotone function of a normal variable.
fn is_monotone_image(law: LawName) -> bool {
    matches!(law, LawName::Normal | LawName::Lognormal)
}

/// The name of the monotone images of a law that is an affine image of one that is not Gaussian.
fn own_image(law: LawName) -> Option<LawName> {
    match law {
        LawName::NoncentralChiSquare => Some(LawName::TransformedNoncentralChiSquare),
        LawName::GaussianMixture => Some(LawName::TransformedGaussianMixture),
        LawName::BesselWithDrift => Some(LawName::TransformedBesselWithDrift),
        _ => None,
    }
}
