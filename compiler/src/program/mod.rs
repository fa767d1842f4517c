//! The step program: what a simulator computes, as single-assignment values sorted by how often they
//! change.
//!
//! [`lower`] turns the planner's decisions into a [`Program`]; the back ends only spell it. Everything
//! that decides a bit of the result is decided here: which operations, in which order, where a
//! multiply-add is fused, what is moved out of the loops over paths and steps.

mod builder;
mod checks;
mod display;
mod facts;
mod formula;
mod functions;
mod laws;
mod lower;
mod op;
mod rate;
#[cfg(test)]
mod sketch;
mod sweep;
#[cfg(test)]
mod tests;
mod verify;

use std::collections::BTreeSet;

pub use checks::{Bound, Check, Range};
pub use facts::{Compared, Fact, Relates};
pub use functions::{BinaryOp, UnaryOp};
pub use laws::{LawImage, LawShape, StateLaw};
pub use lower::{TooLarge, lower};
pub use op::{Argument, Comparison, DrawLaw, Number, Op, ValueId};
pub use rate::Rate;
pub use verify::Fault;

/// A value: what computes it and how often it changes.
#[derive(Clone, Debug, PartialEq)]
pub struct Value {
    /// What computes it.
    pub op: Op,
    /// How often it changes.
    pub rate: Rate,
    /// A name for people: what the value means in the model.
    pub hint: Option<String>,
}

/// A parameter of the simulator.
#[derive(Clone, Debug, PartialEq)]
pub struct Parameter {
    /// Its name.
    pub name: String,
    /// Its unit, as text.
    pub unit: Option<String>,
    /// What it is.
    pub about: Option<String>,
    /// Its value where the caller gives none.
    pub value: Option<f64>,
    /// The admissible values, as text.
    pub range: String,
}

/// A number stored per path from step to step.
#[derive(Clone, Debug, PartialEq)]
pub struct Slot {
    /// The state it belongs to, or the name of a flag.
    pub name: String,
    /// What is stored, as a formula in the state.
    pub coordinate: String,
    /// Its value at time 0.
    pub initial: ValueId,
    /// Its value at the end of a step.
    pub next: ValueId,
}

/// What kind of quantity an output is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum OutputKind {
    /// A state.
    State,
    /// A derived quantity.
    Derived,
    /// A readout.
    Readout,
}

/// An observed quantity.
#[derive(Clone, Debug, PartialEq)]
pub struct Output {
    /// Its name.
    pub name: String,
    /// What kind of quantity it is.
    pub kind: OutputKind,
    /// Its formula as the author wrote it; none for a state.
    pub formula: Option<String>,
    /// Its unit, as text.
    pub unit: Option<String>,
    /// What it is.
    pub about: Option<String>,
    /// Its value at an observation.
    pub value: ValueId,
}

/// Where a value comes from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Note {
    /// The value.
    pub value: ValueId,
    /// The slot it moves; a note on a value that has no statement of its own stands there.
    pub slot: usize,
    /// A sentence.
    pub text: String,
}

/// A model, lowered. Everything a back end needs, and nothing of the formulas it came from.
#[derive(Clone, Debug, PartialEq)]
pub struct Program {
    /// The model's name.
    pub name: String,
    /// One line for people.
    pub title: Option<String>,
    /// Longer text.
    pub about: Option<String>,
    /// Parameters, in file order.
    pub parameters: Vec<Parameter>,
    /// What must hold of the parameters, in the order in which it is checked.
    pub checks: Vec<Check>,
    /// Facts of the model that its ranges and assumptions leave open and that parameter values decide.
    pub facts: Vec<Fact>,
    /// Laws of states after a step, given their values before.
    pub laws: Vec<StateLaw>,
    /// The factor of the drivers' correlation matrix, which exists only where that is positive
    /// semidefinite; none where it cannot fail.
    pub correlation: Option<ValueId>,
    /// Names of the sources of normal draws.
    pub sources: Vec<String>,
    /// Names of the sources of draws from other laws.
    pub draws: Vec<String>,
    /// The stored numbers: one per state in model order, then the flag if there is one.
    pub slots: Vec<Slot>,
    /// The observed quantities, in file order.
    pub outputs: Vec<Output>,
    /// All values; an operand stands before what reads it.
    pub values: Vec<Value>,
    /// Where values come from.
    pub notes: Vec<Note>,
    /// The step values that lanes read, in the order in which they are stored.
    pub step_values: Vec<ValueId>,
    /// The observation values that lanes read, likewise.
    pub observation_values: Vec<ValueId>,
    /// The slot that is 1 once a path has left its domain.
    pub left_domain: Option<usize>,
    /// Whether some scheme is approximate.
    pub approximate: bool,
}

impl Program {
    /// The value behind an id.
    pub fn value(&self, id: ValueId) -> &Value {
        &self.values[id.index()]
    }

    /// The ids of all values of a rate, operands first.
    pub fn section(&self, rate: Rate) -> impl Iterator<Item = ValueId> + '_ {
        self.ids().filter(move |&id| self.value(id).rate == rate)
    }

    /// All ids, operands first.
    pub fn ids(&self) -> impl Iterator<Item = ValueId> + use<> {
        (0..self.values.len() as u32).map(ValueId)
    }

    /// The numbers behind stored step or observation values: one each, as many as it has entries for a
    /// matrix.
    pub fn numbers(&self, stored: &[ValueId]) -> usize {
        stored.iter().map(|&id| self.value(id).op.width()).sum()
    }

    /// The factors of correlated draws, which lanes read as whole matrices.
    pub fn factors(&self) -> BTreeSet<ValueId> {
        let factor = |value: &Value| match value.op {
            Op::Correlate { factor, .. } => Some(factor),
            _ => None,
        };
        self.values.iter().filter_map(factor).collect()
    }

    /// The values that a law needs at every instant it integrates over, operands first.
    pub fn instant_values(&self, law: ValueId) -> Vec<ValueId> {
        let at_instants = |id: &ValueId| self.value(*id).rate == Rate::Instant;
        let mut needed = BTreeSet::new();
        let mut pending = vec![law];
        while let Some(id) = pending.pop() {
            let operands = self.value(id).op.operands().into_iter();
            pending.extend(operands.filter(at_instants).filter(|&o| needed.insert(o)));
        }
        needed.into_iter().collect()
    }

    /// Whether a coefficient or an observation depends on time itself, not only on the length of a step.
    pub fn time_dependent(&self) -> bool {
        self.values
            .iter()
            .any(|v| v.rate != Rate::Law && matches!(v.op, Op::Start | Op::Time))
    }

    /// The setup values the checks need; constructors compute them before anything that can fail.
    pub fn check_values(&self) -> Vec<ValueId> {
        self.setup_values_behind(self.checks.iter().flat_map(Check::operands))
    }

    /// The setup values the facts need.
    pub fn fact_values(&self) -> Vec<ValueId> {
        self.setup_values_behind(self.facts.iter().flat_map(Fact::operands))
    }

    /// The setup and law values behind some values of a law, in order.
    pub fn law_values(&self, of: impl IntoIterator<Item = ValueId>) -> Vec<ValueId> {
        let mut needed = BTreeSet::new();
        let mut pending: Vec<ValueId> = of.into_iter().collect();
        while let Some(id) = pending.pop() {
            let value = self.value(id);
            if matches!(value.rate, Rate::Setup | Rate::Law) && needed.insert(id) {
                pending.extend(value.op.operands());
            }
        }
        needed.into_iter().collect()
    }

    /// Whether a value depends on the value at which a law is asked.
    pub fn is_asked(&self, id: ValueId) -> bool {
        let at = |&id: &ValueId| self.value(id).op == Op::Argument(Argument::At);
        self.law_values([id]).iter().any(at)
    }

    /// The setup values that something else than facts and laws needs.
    pub fn constructor_values(&self) -> Vec<ValueId> {
        let later = self.later_values();
        let read = later.flat_map(|id| self.value(id).op.operands());
        self.setup_values_behind(read.chain(self.results()))
    }

    /// The values that steps and observations compute.
    pub fn later_values(&self) -> impl Iterator<Item = ValueId> + '_ {
        let later = |rate: Rate| rate > Rate::Setup && rate != Rate::Law;
        self.ids().filter(move |&id| later(self.value(id).rate))
    }

    /// The setup values among some values and those they are computed from.
    fn setup_values_behind(&self, ids: impl Iterator<Item = ValueId>) -> Vec<ValueId> {
        let mut needed = vec![false; self.values.len()];
        for id in ids {
            needed[id.index()] = true;
        }
        for index in (0..self.values.len())
            .rev()
            .filter(|&index| self.values[index].rate == Rate::Setup)
        {
            if needed[index] {
                for operand in self.values[index].op.operands() {
                    needed[operand.index()] = true;
                }
            }
        }
        self.section(Rate::Setup)
            .filter(|id| needed[id.index()])
            .collect()
    }
}
