//! The interpreter: a step program run in process, so that the command line needs no Rust toolchain.
//!
//! Values that are the same on all lanes are computed when the simulator is constructed or the grid is
//! prepared; what is left runs an operation at a time over the 256 lanes of a block, in registers that
//! stay in the first-level cache.

mod code;
mod lanes;
mod laws;
mod uniform;

use std::borrow::Cow;
use std::collections::BTreeMap;

use driftwright_runtime::law::Law;
use driftwright_runtime::random::Draws;
use driftwright_runtime::{Arith, Fact, Lane, ParameterError, Shape, Simulator, Source, StepError};

use self::code::Code;
use self::uniform::Uniform;
use crate::program::{Compared, Program, Rate, Relates};

/// A model with its parameters, run operation by operation.
#[derive(Clone, Debug)]
pub struct Interpreter {
    program: Program,
    setup: Uniform,
    sources: Vec<Source>,
    outputs: Vec<Cow<'static, str>>,
    start: Vec<f64>,
    step: Code,
    observe: Code,
}

impl Interpreter {
    /// A simulator of the program. `values` overrides the parameters' default values.
    ///
    /// # Errors
    /// What a generated constructor returns: a value that is not finite or outside its range, an
    /// assumption that does not hold, a state that starts outside its domain, contradictory
    /// correlations. A parameter without any value counts as not a number.
    pub fn new(program: &Program, values: &BTreeMap<String, f64>) -> Result<Self, ParameterError> {
        let parameters: Vec<f64> = program
            .parameters
            .iter()
            .map(|p| values.get(&p.name).copied().or(p.value).unwrap_or(f64::NAN))
            .collect();
        let setup = uniform::construct(program, &parameters)?;
        Ok(Self {
            sources: program.sources.iter().cloned().map(Source::named).collect(),
            outputs: program
                .outputs
                .iter()
                .map(|o| Cow::Owned(o.name.clone()))
                .collect(),
            start: program.slots.iter().map(|s| setup.get(s.initial)).collect(),
            step: Code::step(program, &setup),
            observe: Code::observation(program, &setup),
            program: program.clone(),
            setup,
        })
    }

    /// The values of one uniform section that lanes read.
    fn uniform_values(
        &self,
        rate: Rate,
        times: [f64; 2],
        values: &mut [f64],
    ) -> Result<(), StepError> {
        let mut section = self.setup.clone();
        section.run(&self.program, self.program.section(rate), times)?;
        let read = match rate {
            Rate::Step => &self.program.step_values,
            _ => &self.program.observation_values,
        };
        let numbers = read.iter().flat_map(|&id| section.all(&self.program, id));
        for (value, &number) in values.iter_mut().zip(numbers) {
            *value = number;
        }
        Ok(())
    }
}

impl Simulator for Interpreter {
    fn shape(&self) -> Shape<'_> {
        Shape {
            states: self.program.slots.len(),
            step_values: self.program.numbers(&self.program.step_values),
            step_scratch: self.step.registers,
            sources: &self.sources,
            outputs: &self.outputs,
            observation_values: self.program.numbers(&self.program.observation_values),
            observation_scratch: self.observe.registers,
            left_domain: self.program.left_domain,
            time_dependent: self.program.time_dependent(),
            approximate: self.program.approximate,
        }
    }

    fn start(&self, states: &mut [f64]) {
        states.copy_from_slice(&self.start);
    }

    fn step_values(&self, start: f64, length: f64, values: &mut [f64]) -> Result<(), StepError> {
        self.uniform_values(Rate::Step, [start, length], values)
    }

    fn observation_values(&self, time: f64, values: &mut [f64]) -> Result<(), StepError> {
        self.uniform_values(Rate::Observation, [time, 0.0], values)
    }

    #[inline(always)]
    fn step<A: Arith>(
        &self,
        values: &[f64],
        states: &mut [Lane],
        noise: &[Lane],
        draws: &Draws,
        scratch: &mut [Lane],
    ) {
        lanes::run::<A>(&self.step, values, states, noise, Some(draws), scratch);
        lanes::write(&self.step, values, None, noise, scratch, states);
    }

    #[inline(always)]
    fn observe<A: Arith>(
        &self,
        values: &[f64],
        states: &[Lane],
        outputs: &mut [Lane],
        scratch: &mut [Lane],
    ) {
        lanes::run::<A>(&self.observe, values, states, &[], None, scratch);
        lanes::write(&self.observe, values, Some(states), &[], scratch, outputs);
    }

    fn law(&self, state: usize, before: f64, start: f64, length: f64) -> Option<Box<dyn Law>> {
        let found = self.program.laws.iter().find(|law| law.slot == state)?;
        let step = [start, length];
        Some(laws::law(&self.program, &self.setup, found, before, step))
    }

    fn facts(&self) -> Vec<Fact> {
        let compared = |&(left, relates, right): &Compared| {
            let (left, right) = (self.setup.get(left), self.setup.get(right));
            match relates {
                Relates::Greater => left > right,
                Relates::AtLeast => left >= right,
                Relates::Equal => left == right,
            }
        };
        let facts = self.program.facts.iter();
        facts
            .map(|fact| Fact {
                statement: Cow::Owned(fact.statement.clone()),
                condition: Cow::Owned(fact.condition.clone()),
                holds: fact.alternatives.iter().any(|all| all.iter().all(compared)),
            })
            .collect()
    }
}
