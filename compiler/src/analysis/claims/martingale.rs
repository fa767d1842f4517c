//! Claims that a formula is a true martingale on every finite horizon.

use super::{ClaimResult, Comparison, Court, Verdict, compare, quoted};
use crate::analysis::condition::{self, Standing};
use crate::analysis::integral_test;
use crate::calculus::Expansion;
use crate::model::{Claim, Formula};

impl Court<'_> {
    pub(super) fn martingale(&self, claim: &Claim, of: &Formula) -> ClaimResult {
        let pool = &self.model.pool;
        let expansion = self.system.expand(of.expr);
        let what = format!("the Ito drift of {}", quoted(of));
        let comparison = compare(self.model, expansion.drift, pool.zero());
        let (verdict, reason, local) = match &comparison {
            Comparison::Different(_) => (
                Verdict::Refuted,
                format!("{what} is not zero"),
                Verdict::Refuted,
            ),
            Comparison::Unknown => {
                let reason = format!("{what} could be shown neither zero nor different from zero");
                (Verdict::Open, reason, Verdict::Open)
            }
            Comparison::Equal => {
                let (verdict, reason) = self.integrable(&what, &expansion);
                (verdict, reason, Verdict::Proved)
            }
        };
        let mut result = self.result(claim, verdict, reason);
        result.derived = Some(expansion.drift);
        result.claimed = Some(pool.zero());
        result.local = Some(local);
        result.trace = expansion.trace;
        if let Comparison::Different(witness) = comparison {
            result.witness = Some(witness);
            result.difference = Some(expansion.drift);
        }
        result
    }

    /// The verdict on a formula without drift.
    fn integrable(&self, what: &str, expansion: &Expansion) -> (Verdict, String) {
        let pool = &self.model.pool;
        if expansion
            .diffusion
            .iter()
            .all(|&b| pool.is_zero(b).is_yes())
        {
            return (Verdict::Proved, "the formula is constant".to_owned());
        }
        if let Some(reason) = self.moments.martingale_reason(expansion) {
            return (Verdict::Proved, format!("{what} is zero, and {reason}"));
        }
        let test = integral_test::of(self.model, &self.system, expansion);
        match test.as_ref().map(|t| t.standing) {
            Some(Standing::Implied) => {
                let reason = format!("{what} is zero, and {}", integral_test::RULE);
                return (Verdict::Proved, reason);
            }
            Some(Standing::Contradicted) => {
                let reason = format!(
                    "{what} is zero, but its diffusion b grows faster than linearly, so that the integral \
                     of x/b(x)^2 towards infinity is finite: a strict local martingale, whose mean falls"
                );
                return (Verdict::Refuted, reason);
            }
            Some(Standing::Open) | None => {}
        }
        let mut reason = format!(
            "{what} is zero, so it is a local martingale; that it is a true one was not shown"
        );
        if let Some(test) = test {
            let condition = condition::format(&self.model.pool, &[test.condition]);
            reason.push_str(&format!(": it is if and only if {condition}"));
        }
        (Verdict::Open, reason)
    }
}
