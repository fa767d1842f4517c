//! Claims about Ito's rule: `drift_of` and `diffusion_of`.

use super::{ClaimResult, Court, Verdict, quoted};
use crate::analysis::moments::{Edge, edge, is_smooth_at_ends};
use crate::model::{Claim, Formula};
use crate::symbolic::Expr;

impl Court<'_> {
    pub(super) fn drift(&self, claim: &Claim, of: &Formula, is: &Formula) -> ClaimResult {
        let expansion = self.system.expand(of.expr);
        let what = format!("the Ito drift of {}", quoted(of));
        let correction = expansion.ito_correction;
        let mut result = self.settle(claim, &what, expansion.drift, is.expr, expansion.trace);
        let pool = &self.model.pool;
        let lost = |difference: Expr| pool.equal(difference, correction).is_yes();
        if result.verdict == Verdict::Refuted && result.difference.is_some_and(lost) {
            let correction = pool.format(correction);
            result.reason += &format!(": it lacks the Ito correction {correction}");
        }
        self.until_the_end(of.expr, result)
    }

    pub(super) fn diffusion(
        &self,
        claim: &Claim,
        of: &Formula,
        is: &[(usize, Formula)],
    ) -> ClaimResult {
        let pool = &self.model.pool;
        let expansion = self.system.expand(of.expr);
        let results: Vec<ClaimResult> = (self.model.drivers.iter().enumerate())
            .map(|(j, driver)| {
                let named = is.iter().find(|(k, _)| *k == j);
                let claimed = named.map_or(pool.zero(), |(_, formula)| formula.expr);
                let what = format!("the coefficient of d{} in {}", driver.name, quoted(of));
                let trace = expansion.trace.clone();
                self.settle(claim, &what, expansion.diffusion[j], claimed, trace)
            })
            .collect();
        // The worst verdict stands for all; among equals the first that is not about a zero.
        let rank = |r: &ClaimResult| match r.verdict {
            Verdict::Refuted => 0,
            Verdict::Open => 1,
            Verdict::Proved if r.claimed.is_some_and(|c| !pool.is_zero_literal(c)) => 2,
            Verdict::Proved => 3,
        };
        let none = || self.result(claim, Verdict::Proved, "the model has no drivers");
        let worst = results.into_iter().min_by_key(rank).unwrap_or_else(none);
        self.until_the_end(of.expr, worst)
    }

    /// A proof by Ito's rule holds until a finite end of a domain is reached: where one is, and the
    /// coefficients do not keep the process inside, the claim is open.
    fn until_the_end(&self, formula: Expr, mut result: ClaimResult) -> ClaimResult {
        if result.verdict != Verdict::Proved {
            return result;
        }
        for i in self.system.closure([formula]) {
            if self.moments.has_exact_law(i) {
                continue;
            }
            let name = &self.model.states[i].name;
            match edge(self.model, self.dynamics, i) {
                Edge::NeverReached => {}
                Edge::KeptInside if is_smooth_at_ends(self.model, i, formula) => {}
                Edge::Undecided => {
                    result.reason += &format!(
                        ", until {name} reaches an end of its domain, which is not excluded"
                    );
                }
                Edge::KeptInside | Edge::Left => {
                    result.verdict = Verdict::Open;
                    result.reason += &format!(
                        ", but only until {name} reaches an end of its domain, where the equation \
                         or the formula ceases to hold"
                    );
                }
            }
        }
        result
    }
}
