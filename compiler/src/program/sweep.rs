//! Keeps the values something reads, numbers them densely, and finds what lanes read of the slower
//! sections.

use std::collections::BTreeSet;

use super::op::{Op, ValueId};
use super::rate::Rate;
use super::{Check, Fact, Program, StateLaw};

impl Program {
    /// Everything a back end must compute.
    pub(super) fn roots(&self) -> Vec<ValueId> {
        let facts = self.facts.iter().flat_map(Fact::operands);
        let laws = self.laws.iter().flat_map(StateLaw::operands);
        self.results().chain(facts).chain(laws).collect()
    }

    /// Everything that a simulator needs to be constructed and to run.
    pub(super) fn results(&self) -> impl Iterator<Item = ValueId> + '_ {
        let slots = self.slots.iter().flat_map(|s| [s.initial, s.next]);
        let outputs = self.outputs.iter().map(|o| o.value);
        let checks = self.checks.iter().flat_map(Check::operands);
        slots.chain(outputs).chain(checks).chain(self.correlation)
    }

    /// The program without the values nothing reads.
    pub(super) fn swept(mut self) -> Self {
        let live = self.live();
        let mut new_ids = vec![None; self.values.len()];
        let mut kept = Vec::new();
        for (index, mut value) in std::mem::take(&mut self.values).into_iter().enumerate() {
            if !live[index] {
                continue;
            }
            new_ids[index] = Some(ValueId(kept.len() as u32));
            value.op = value.op.map(|id| renumbered(&new_ids, id));
            kept.push(value);
        }
        self.values = kept;
        self.rename(&new_ids);
        self.step_values = self.read_by_lanes(Rate::Step, Rate::StepLane);
        self.observation_values = self.read_by_lanes(Rate::Observation, Rate::ObservationLane);
        self
    }

    fn live(&self) -> Vec<bool> {
        let mut live = vec![false; self.values.len()];
        let mut stack = self.roots();
        while let Some(id) = stack.pop() {
            if !std::mem::replace(&mut live[id.index()], true) {
                stack.extend(self.value(id).op.operands());
            }
        }
        live
    }

    fn rename(&mut self, new_ids: &[Option<ValueId>]) {
        for slot in &mut self.slots {
            slot.initial = renumbered(new_ids, slot.initial);
            slot.next = renumbered(new_ids, slot.next);
        }
        for output in &mut self.outputs {
            output.value = renumbered(new_ids, output.value);
        }
        self.correlation = self.correlation.map(|id| renumbered(new_ids, id));
        let checks = std::mem::take(&mut self.checks);
        self.checks = checks
            .into_iter()
            .map(|c| c.map(|id| renumbered(new_ids, id)))
            .collect();
        let facts = std::mem::take(&mut self.facts);
        self.facts = facts
            .into_iter()
            .map(|f| f.map(|id| renumbered(new_ids, id)))
            .collect();
        let laws = std::mem::take(&mut self.laws);
        self.laws = laws
            .into_iter()
            .map(|l| l.map(|id| renumbered(new_ids, id)))
            .collect();
        let slots = &self.slots;
        for note in &mut self.notes {
            // What folded away is told where the slot moves.
            note.value = new_ids[note.value.index()].unwrap_or(slots[note.slot].next);
        }
    }

    /// The values of rate `uniform` that lanes of rate `lane` read or that are themselves results; whole
    /// matrices stand last.
    fn read_by_lanes(&self, uniform: Rate, lane: Rate) -> Vec<ValueId> {
        let operands = self
            .section(lane)
            .flat_map(|id| self.value(id).op.operands());
        let results: Vec<ValueId> = match lane {
            Rate::StepLane => self.slots.iter().map(|s| s.next).collect(),
            _ => self.outputs.iter().map(|o| o.value).collect(),
        };
        let read: BTreeSet<ValueId> = operands
            .chain(results)
            .filter(|&id| self.value(id).rate == uniform)
            .collect();
        let (matrices, mut numbers): (Vec<ValueId>, Vec<ValueId>) = read
            .into_iter()
            .partition(|&id| self.value(id).op.is_aggregate());
        numbers.extend(matrices);
        numbers
    }
}

fn renumbered(new_ids: &[Option<ValueId>], id: ValueId) -> ValueId {
    new_ids[id.index()].expect("an operand of a live value is live")
}

impl Op {
    /// The operation with every operand replaced.
    fn map(self, f: impl Fn(ValueId) -> ValueId) -> Self {
        let all = |ids: Box<[ValueId]>| ids.iter().map(|&id| f(id)).collect();
        match self {
            Self::Unary(op, a) => Self::Unary(op, f(a)),
            Self::Binary(op, a, b) => Self::Binary(op, f(a), f(b)),
            Self::MulAdd(a, b, c) => Self::MulAdd(f(a), f(b), f(c)),
            Self::Select {
                compare,
                a,
                b,
                then,
                otherwise,
            } => Self::Select {
                compare,
                a: f(a),
                b: f(b),
                then: f(then),
                otherwise: f(otherwise),
            },
            Self::Cholesky { dim, covariance } => Self::Cholesky {
                dim,
                covariance: all(covariance),
            },
            Self::Transition {
                dim,
                a,
                alpha,
                q,
                length,
            } => Self::Transition {
                dim,
                a: all(a),
                alpha: all(alpha),
                q: all(q),
                length: f(length),
            },
            Self::MovingTransition {
                dim,
                a,
                alpha,
                q,
                start,
                length,
            } => Self::MovingTransition {
                dim,
                a: all(a),
                alpha: all(alpha),
                q: all(q),
                start: f(start),
                length: f(length),
            },
            Self::Correlate { factor, sources } => Self::Correlate {
                factor: f(factor),
                sources,
            },
            Self::Areas {
                length,
                drivers,
                pairs,
            } => Self::Areas {
                length: f(length),
                drivers,
                pairs,
            },
            Self::Extract(a, index) => Self::Extract(f(a), index),
            Self::Draw {
                law,
                source,
                parameter,
            } => Self::Draw {
                law,
                source,
                parameter: f(parameter),
            },
            leaf => leaf,
        }
    }
}
