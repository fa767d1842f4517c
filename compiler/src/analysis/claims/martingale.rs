//! Claims that a formula is a true martingale on every finite horizon.

use super::{ClaimResult, Comparison, Court, Verdict, compare, quoted};
use crate::calculus::{Expansion, bracket};
use crate::model::{Claim, Formula};
use crate::symbolic::{Bound, Expr};

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
        if self.is_strict(expansion) {
            let reason = format!(
                "{what} is zero, but its diffusion b grows faster than linearly, so that the integral \
                 of x/b(x)^2 towards infinity is finite: a strict local martingale, whose mean falls"
            );
            return (Verdict::Refuted, reason);
        }
        let reason = format!(
            "{what} is zero, so it is a local martingale; that it is a true one was not shown"
        );
        (Verdict::Open, reason)
    }

    /// Whether the formula is a multiple of a state `dX = s X^p dW` on `(0, inf)` with `p > 1`: a
    /// strict local martingale (Delbaen and Shirakawa 2002, "No arbitrage condition for positive
    /// diffusion price processes").
    fn is_strict(&self, expansion: &Expansion) -> bool {
        let pool = &self.model.pool;
        let &[i] = self.system.closure([expansion.formula]).as_slice() else {
            return false;
        };
        let state = &self.model.states[i];
        let x = pool.var(state.symbol);
        let fixed = |e: Expr| {
            let moves = |&s: &_| s == self.model.time || self.system.position(s).is_some();
            !pool.symbols_of(e).iter().any(moves)
        };
        let from_zero = matches!(state.domain.lower, Bound::Open(e) if pool.is_zero(e).is_yes());
        let multiple = pool.simplify(pool.div(expansion.formula, x));
        if !from_zero || state.domain.upper != Bound::Infinite || !fixed(multiple) {
            return false;
        }
        let noise = &self.system.processes[i].diffusion;
        let rate = bracket(self.model, noise, noise);
        // The exponent of a power of x is x f'/f.
        let slope = pool.derivative(rate, state.symbol);
        let exponent = pool.simplify(pool.div(pool.mul(x, slope), rate));
        let factor = pool.simplify(pool.div(rate, pool.pow(x, exponent)));
        let excess = pool.simplify(pool.sub(exponent, pool.int(2)));
        fixed(exponent)
            && fixed(factor)
            && pool.sign(factor).is_positive()
            && pool.sign(excess).is_positive()
    }
}
