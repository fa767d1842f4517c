//! What a constructor does: parameters, checks, the coordinates at time 0.

use std::collections::BTreeMap;

use super::Lowering;
use crate::model::Relation;
use crate::program::Parameter;
use crate::program::checks::{Bound, Check, Range};
use crate::program::formula::nearest;
use crate::program::op::{Comparison, ValueId};
use crate::symbolic::{self, Expr, Interval};

impl Lowering<'_> {
    /// The parameters as the simulator's user meets them.
    pub(super) fn parameters(&self) -> Vec<Parameter> {
        let pool = &self.model.pool;
        let text = |interval: &Interval| {
            let end = |bound: symbolic::Bound, infinite: &str| {
                bound
                    .value()
                    .map_or(infinite.to_owned(), |end| pool.format(end))
            };
            let closed = |bound: symbolic::Bound| matches!(bound, symbolic::Bound::Closed(_));
            let open = if closed(interval.lower) { '[' } else { '(' };
            let close = if closed(interval.upper) { ']' } else { ')' };
            format!(
                "{open}{}, {}{close}",
                end(interval.lower, "-inf"),
                end(interval.upper, "inf")
            )
        };
        let parameter = |p: &crate::model::Parameter| Parameter {
            name: p.name.clone(),
            unit: p.unit.clone(),
            about: p.about.clone(),
            value: p.value.as_ref().map(nearest),
            range: text(&p.range),
        };
        self.model.parameters.iter().map(parameter).collect()
    }

    /// Ranges, then assumptions, then the states' starts.
    pub(super) fn checks(&mut self) -> Vec<Check> {
        let model = self.model;
        let mut checks = Vec::new();
        for (index, parameter) in model.parameters.iter().enumerate() {
            checks.push(Check::Range {
                parameter: index,
                range: self.range(&parameter.range),
            });
        }
        for assumption in &model.assumptions {
            let (left, right) = (
                self.in_setup(assumption.left),
                self.in_setup(assumption.right),
            );
            let (compare, (left, right)) = match assumption.relation {
                Relation::Less => (Comparison::Less, (left, right)),
                Relation::LessEqual => (Comparison::LessEqual, (left, right)),
                Relation::Greater => (Comparison::Less, (right, left)),
                Relation::GreaterEqual => (Comparison::LessEqual, (right, left)),
            };
            let (name, text) = (assumption.name.clone(), assumption.text.clone());
            checks.push(Check::Assumption {
                name,
                text,
                compare,
                left,
                right,
            });
        }
        for state in &model.states {
            let value = self.in_setup(state.initial.expr);
            let domain = self.range(&state.domain);
            checks.push(Check::Initial {
                state: state.name.clone(),
                value,
                domain,
            });
        }
        checks
    }

    pub(super) fn range(&mut self, interval: &Interval) -> Range {
        Range {
            lower: self.bound(interval.lower),
            upper: self.bound(interval.upper),
        }
    }

    fn bound(&mut self, bound: symbolic::Bound) -> Bound {
        match bound {
            symbolic::Bound::Infinite => Bound::Infinite,
            symbolic::Bound::Open(end) => Bound::Open(self.in_setup(end)),
            symbolic::Bound::Closed(end) => Bound::Closed(self.in_setup(end)),
        }
    }

    /// The factor of the drivers' correlation matrix, where that could fail to be one and does not depend
    /// on time.
    pub(super) fn correlation(&mut self) -> Option<ValueId> {
        let (pool, matrix) = (&self.model.pool, &self.model.correlation);
        let entries: Vec<Expr> = matrix.iter().flatten().copied().collect();
        let off_diagonal = |(i, row): (usize, &Vec<Expr>)| {
            row.iter()
                .enumerate()
                .any(|(k, &entry)| i != k && !pool.is_zero_literal(entry))
        };
        let correlated = matrix.iter().enumerate().any(off_diagonal);
        let timed = entries
            .iter()
            .any(|&entry| pool.depends_on(entry, self.model.time));
        if !correlated || timed {
            return None;
        }
        let values = entries
            .into_iter()
            .map(|entry| self.in_setup(entry))
            .collect();
        Some(self.builder.cholesky(matrix.len(), values))
    }

    /// A state's coordinate at time 0.
    pub(super) fn initial(&mut self, state: usize) -> ValueId {
        let pool = &self.model.pool;
        let declared = &self.model.states[state];
        let start = BTreeMap::from([
            (declared.symbol, declared.initial.expr),
            (self.model.time, pool.zero()),
        ]);
        let coordinate = pool.substitute(self.plan.coordinates[state].forward, &start);
        self.in_setup(coordinate)
    }
}
