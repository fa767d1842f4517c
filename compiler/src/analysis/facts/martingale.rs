//! Whether states that are martingales locally, discounted by their constant growth, are true ones.

use super::{Fact, Finder, Topic, plain};
use crate::analysis::boundary::{End, classify};
use crate::analysis::condition::Standing;
use crate::analysis::end_rules;
use crate::analysis::free::{Freedom, free_of};
use crate::analysis::integral_test;
use crate::symbolic::Expr;

impl Finder<'_> {
    /// One fact for each random state whose drift is a constant multiple of it.
    pub(super) fn martingales(&self) -> Vec<Fact> {
        (0..self.model.states.len())
            .filter_map(|i| self.martingale(i, self.discounted(i)?))
            .collect()
    }

    /// The state, times `exp(-m t)` where its drift is m times the state.
    fn discounted(&self, state: usize) -> Option<Expr> {
        let (pool, process) = (&self.model.pool, &self.dynamics.states[state]);
        let x = pool.var(self.model.states[state].symbol);
        let reflects = |rule: end_rules::Ruled| {
            !rule.absorbs
                && classify(self.model, self.dynamics, state, rule.side) != End::NotReached
        };
        if end_rules::ruled(self.model, state).any(reflects) {
            return None;
        }
        if process.diffusion.iter().all(|&b| pool.is_zero_literal(b)) {
            return None;
        }
        let states: Vec<_> = self.model.states.iter().map(|s| s.symbol).collect();
        let Freedom::Free(rate) = free_of(pool, pool.div(process.drift, x), &states) else {
            return pool.is_zero(process.drift).is_yes().then_some(x);
        };
        if pool.depends_on(rate, self.model.time) {
            return None;
        }
        let decay = pool.exp(pool.neg(pool.mul(rate, pool.var(self.model.time))));
        Some(pool.simplify(pool.mul(decay, x)))
    }

    fn martingale(&self, state: usize, formula: Expr) -> Option<Fact> {
        let pool = &self.model.pool;
        let statement = format!("{} is a martingale", pool.format(formula));
        let expansion = self.system.expand(formula);
        if !pool.is_zero(expansion.drift).is_yes() {
            return None;
        }
        let fact = |standing, because: String| {
            plain(
                Topic::Martingale,
                vec![state],
                statement.clone(),
                standing,
                because,
            )
        };
        if let Some(reason) = self.moments.martingale_reason(&expansion) {
            return Some(fact(Standing::Implied, reason));
        }
        let Some(test) = integral_test::of(self.model, &self.system, &expansion) else {
            let because = "a local martingale; that it is a true one was not shown";
            return Some(fact(Standing::Open, because.to_owned()));
        };
        let mut found = fact(test.standing, integral_test::RULE.to_owned());
        found.condition = Some(vec![test.condition]);
        Some(found)
    }
}
