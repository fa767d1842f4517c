//! Claims about moments: `mean_of`, `variance_of`, `covariance_of`.

use super::{ClaimResult, Court, Verdict, quoted};
use crate::analysis::moments::Moment;
use crate::model::{Claim, Formula};
use crate::symbolic::trace::Trace;

impl Court<'_> {
    pub(super) fn mean(&self, claim: &Claim, of: &Formula, is: &Formula) -> ClaimResult {
        let what = format!("the mean of {}", quoted(of));
        self.moment(claim, &what, self.moments.mean(of.expr), is)
    }

    pub(super) fn variance(&self, claim: &Claim, of: &Formula, is: &Formula) -> ClaimResult {
        let what = format!("the variance of {}", quoted(of));
        self.moment(claim, &what, self.moments.variance(of.expr), is)
    }

    pub(super) fn covariance(&self, claim: &Claim, of: &[Formula; 2], is: &Formula) -> ClaimResult {
        let [a, b] = of;
        let what = format!("the covariance of {} and {}", quoted(a), quoted(b));
        self.moment(claim, &what, self.moments.covariance(a.expr, b.expr), is)
    }

    fn moment(
        &self,
        claim: &Claim,
        what: &str,
        found: Option<Moment>,
        is: &Formula,
    ) -> ClaimResult {
        let Some(moment) = found else {
            let reason = format!("no closed form of {what} was derived");
            let mut result = self.result(claim, Verdict::Open, reason);
            result.claimed = Some(is.expr);
            return result;
        };
        let mut trace = Trace::new();
        let note = format!("{what} ({})", moment.source);
        trace.push("moment", note, None, moment.value);
        let mut result = self.settle(claim, what, moment.value, is.expr, trace);
        result.reason += &format!(" ({})", moment.source);
        result
    }
}
