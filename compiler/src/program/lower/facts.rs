//! The conditions of open facts as comparisons of values.

use super::Lowering;
use crate::analysis::condition::{self, Condition};
use crate::analysis::facts;
use crate::program::facts::{Compared, Fact};

impl Lowering<'_> {
    /// The facts that ranges and assumptions leave open and that values of the parameters decide.
    pub(super) fn facts(&mut self, found: &[facts::Fact]) -> Vec<Fact> {
        let model = self.model;
        found
            .iter()
            .filter_map(|fact| {
                let alternatives = fact.to_check(model)?;
                Some(Fact {
                    statement: fact.statement.clone(),
                    condition: condition::format(&model.pool, alternatives),
                    alternatives: alternatives
                        .iter()
                        .map(|all| all.iter().map(|c| self.compared(c)).collect())
                        .collect(),
                })
            })
            .collect()
    }

    fn compared(&mut self, condition: &Condition) -> Compared {
        let (left, right) = (
            self.in_setup(condition.left),
            self.in_setup(condition.right),
        );
        (left, condition.relates, right)
    }
}
