//! Lane sections as straight code: operands resolved, registers assigned.

use std::collections::BTreeMap;
use std::ops::Range;

use driftwright_runtime::source_id;

use super::uniform::Uniform;
use crate::program::{BinaryOp, Comparison, DrawLaw, Op, Program, Rate, UnaryOp, ValueId};

/// Where an instruction finds an operand.
#[derive(Clone, Copy, Debug)]
pub(super) enum Operand {
    /// A number, the same on all lanes.
    Number(f64),
    /// A value of the step or observation, the same on all lanes.
    Value(usize),
    /// A state slot.
    State(usize),
    /// A lane of draws.
    Noise(usize),
    /// A scratch register.
    Register(usize),
}

/// What an instruction does with its operands.
#[derive(Clone, Copy, Debug)]
pub(super) enum Action {
    Unary(UnaryOp, Operand),
    Binary(BinaryOp, Operand, Operand),
    MulAdd(Operand, Operand, Operand),
    Select(Comparison, [Operand; 4]),
    Draw(DrawLaw, u64, Operand),
}

/// An action and the register its result goes to, which none of its operands is.
#[derive(Clone, Copy, Debug)]
pub(super) struct Instruction {
    pub(super) action: Action,
    pub(super) target: usize,
}

/// What is done before the first instruction. `first` is the register of the first result; the others follow.
#[derive(Clone, Debug)]
pub(super) enum Before {
    /// Draws are mixed.
    Correlate {
        factor: Factor,
        sources: Box<[usize]>,
        first: usize,
    },
    /// Levy areas are drawn, sources by their numbers.
    Areas {
        length: Operand,
        drivers: Box<[(usize, u64)]>,
        pairs: Box<[(usize, usize, u64)]>,
        first: usize,
    },
}

/// Where a triangular factor stands.
#[derive(Clone, Debug)]
pub(super) enum Factor {
    /// Its entries, the same in every step.
    Numbers(Vec<f64>),
    /// Among the values of the step.
    Values(Range<usize>),
}

/// A lane section.
#[derive(Clone, Debug)]
pub(super) struct Code {
    pub(super) before: Vec<Before>,
    pub(super) instructions: Vec<Instruction>,
    pub(super) results: Vec<Operand>,
    /// Scratch lanes needed.
    pub(super) registers: usize,
}

impl Code {
    /// The lanes of a step; the results are the new states.
    pub(super) fn step(program: &Program, setup: &Uniform) -> Self {
        let results: Vec<ValueId> = program.slots.iter().map(|s| s.next).collect();
        Assembler::new(program, setup, Rate::StepLane, &results).assemble(&results)
    }

    /// The lanes of an observation; the results are the outputs.
    pub(super) fn observation(program: &Program, setup: &Uniform) -> Self {
        let results: Vec<ValueId> = program.outputs.iter().map(|o| o.value).collect();
        Assembler::new(program, setup, Rate::ObservationLane, &results).assemble(&results)
    }
}

struct Assembler<'a> {
    program: &'a Program,
    setup: &'a Uniform,
    rate: Rate,
    values: BTreeMap<ValueId, usize>,
    last_use: BTreeMap<ValueId, usize>,
    registers: BTreeMap<ValueId, usize>,
    free: Vec<usize>,
    count: usize,
}

impl<'a> Assembler<'a> {
    fn new(program: &'a Program, setup: &'a Uniform, rate: Rate, results: &[ValueId]) -> Self {
        let mut last_use = BTreeMap::new();
        for id in program.section(rate) {
            for operand in program.value(id).op.operands() {
                last_use.insert(operand, id.index());
            }
        }
        for &id in results {
            last_use.insert(id, usize::MAX);
        }
        let stored = match rate {
            Rate::StepLane => &program.step_values,
            _ => &program.observation_values,
        };
        let mut end = 0;
        let values = stored.iter().map(|&id| {
            let place = end;
            end += program.value(id).op.width();
            (id, place)
        });
        let values = values.collect();
        let registers = BTreeMap::new();
        Self {
            program,
            setup,
            rate,
            values,
            last_use,
            registers,
            free: Vec::new(),
            count: 0,
        }
    }

    fn assemble(mut self, results: &[ValueId]) -> Code {
        let program = self.program;
        let (mut before, mut instructions) = (Vec::new(), Vec::new());
        for id in program.section(self.rate) {
            let op = &program.value(id).op;
            before.extend(self.before(op, id));
            if let Some(action) = self.action(op) {
                // Taken before the operands are released: a target is never an operand.
                let target = self.take();
                self.registers.insert(id, target);
                instructions.push(Instruction { action, target });
                self.release(op, id);
            }
        }
        let results = results.iter().map(|&id| self.operand(id)).collect();
        Code {
            before,
            instructions,
            results,
            registers: self.count,
        }
    }

    /// Mixed draws and areas get registers that nothing has written before them; a row is freed like any other.
    fn before(&mut self, op: &Op, id: ValueId) -> Option<Before> {
        if let Op::Extract(of, row) = op {
            let register = self.registers[of] + row;
            self.registers.insert(id, register);
        }
        let first = self.count;
        let before = match op {
            Op::Correlate { factor, sources } => Before::Correlate {
                factor: self.factor(*factor),
                sources: sources.clone(),
                first,
            },
            Op::Areas {
                length,
                drivers,
                pairs,
            } => {
                let number = |draw: usize| source_id(&self.program.draws[draw]);
                let driver = |&(increment, terms)| (increment, number(terms));
                Before::Areas {
                    length: self.operand(*length),
                    drivers: drivers.iter().map(driver).collect(),
                    pairs: pairs.iter().map(|&(p, q, r)| (p, q, number(r))).collect(),
                    first,
                }
            }
            _ => return None,
        };
        self.count += op.lanes();
        self.registers.insert(id, first);
        Some(before)
    }

    fn factor(&self, id: ValueId) -> Factor {
        let entries = self.setup.all(self.program, id);
        match self.values.get(&id) {
            Some(&place) => Factor::Values(place..place + entries.len()),
            None => Factor::Numbers(entries.to_vec()),
        }
    }

    fn take(&mut self) -> usize {
        self.free.pop().unwrap_or_else(|| {
            self.count += 1;
            self.count - 1
        })
    }

    fn release(&mut self, op: &Op, at: ValueId) {
        let mut operands = op.operands();
        operands.sort_unstable();
        operands.dedup();
        for operand in operands {
            if self.last_use.get(&operand) == Some(&at.index()) {
                self.free.extend(self.registers.get(&operand));
            }
        }
    }

    fn action(&self, op: &Op) -> Option<Action> {
        let operand = |id: ValueId| self.operand(id);
        match *op {
            Op::Unary(op, a) => Some(Action::Unary(op, operand(a))),
            Op::Binary(op, a, b) => Some(Action::Binary(op, operand(a), operand(b))),
            Op::MulAdd(a, b, c) => Some(Action::MulAdd(operand(a), operand(b), operand(c))),
            Op::Select {
                compare,
                a,
                b,
                then,
                otherwise,
            } => Some(Action::Select(
                compare,
                [a, b, then, otherwise].map(operand),
            )),
            Op::Draw {
                law,
                source,
                parameter,
            } => Some(Action::Draw(
                law,
                source_id(&self.program.draws[source]),
                operand(parameter),
            )),
            _ => None,
        }
    }

    fn operand(&self, id: ValueId) -> Operand {
        let value = self.program.value(id);
        match value.op {
            Op::State(slot) => Operand::State(slot),
            Op::Noise(source) => Operand::Noise(source),
            _ if value.rate <= Rate::Setup => Operand::Number(self.setup.get(id)),
            _ if value.rate.is_lane() => Operand::Register(self.registers[&id]),
            _ => Operand::Value(self.values[&id]),
        }
    }
}
