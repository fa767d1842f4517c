//! From the planner's decisions to the step program.
//!
//! Formulas are lowered in one of four environments: the constructor (parameters), a step (time at its
//! start, its length, the stored coordinates, the drivers' increments), an instant within a step (its
//! time) and an observation (its time, the stored coordinates).

mod approximate;
mod areas;
mod carried;
mod constructor;
mod exact;
mod facts;
mod implicit;
mod laws;
mod linear_flow;
mod noise;
mod observe;
mod own_draws;
mod quadratic_exponential;
mod random_drift;
mod rows;
mod runge_kutta;
mod square_root;
mod system;

use std::collections::BTreeMap;
use std::fmt;

use self::noise::Noise;
use super::builder::{Builder, MAX_OPERATIONS, Phase};
use super::formula::{Environment, Formulas};
use super::op::ValueId;
use super::{Note, Program, Slot};
use crate::analysis::facts::Fact;
use crate::model::Model;
use crate::scheme::{Method, Plan};
use crate::symbolic::{Expr, Symbol, SymbolKind};

/// A step program with more operations than it may have.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct TooLarge;

impl fmt::Display for TooLarge {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "a step takes more than {MAX_OPERATIONS} operations")
    }
}

impl std::error::Error for TooLarge {}

/// Lowers a model and its plan; the facts that are open are checked where parameter values are known. The result has passed [`Program::verify`].
///
/// # Errors
/// [`TooLarge`] where states that read one another, or drivers of one state, are so many that their pairs
/// exceed the budget: no program of that size could be compiled or run.
///
/// # Panics
/// When the program does not pass the verifier, or a formula of the plan reads what its place in a step
/// does not offer: faults of the compiler, not of the model.
pub fn lower(model: &Model, plan: &Plan, facts: &[Fact]) -> Result<Program, TooLarge> {
    let mut lowering = Lowering::new(model, plan);
    let mut slots = lowering.slots();
    let left_domain = lowering.domain_flag(&mut slots);
    let outputs = lowering.outputs();
    let checks = lowering.checks();
    let correlation = lowering.correlation();
    let facts = lowering.facts(facts);
    let laws = lowering.laws();
    if lowering.builder.is_exhausted() {
        return Err(TooLarge);
    }
    let program = Program {
        name: model.name.clone(),
        title: model.title.clone(),
        about: model.about.clone(),
        parameters: lowering.parameters(),
        checks,
        facts,
        laws,
        correlation,
        sources: plan
            .noise
            .components
            .iter()
            .map(|c| c.source.clone())
            .chain(std::mem::take(&mut lowering.normals))
            .collect(),
        draws: std::mem::take(&mut lowering.draws),
        slots,
        outputs,
        notes: std::mem::take(&mut lowering.notes),
        values: lowering.builder.into_values(),
        step_values: Vec::new(),
        observation_values: Vec::new(),
        left_domain,
        approximate: plan.groups.iter().any(|g| !g.is_exact()),
    };
    let program = program.swept();
    if let Err(fault) = program.verify() {
        panic!("the step program of `{}` is faulty: {fault}", program.name);
    }
    Ok(program)
}

/// Everything a pass over the plan shares.
struct Lowering<'a> {
    model: &'a Model,
    plan: &'a Plan,
    builder: Builder,
    /// The symbol of the length of a step; no name a formula could contain.
    length: Symbol,
    /// What parameters stand for, everywhere.
    parameters: BTreeMap<Symbol, ValueId>,
    setup: Environment,
    step: Environment,
    instant: Environment,
    observation: Environment,
    notes: Vec<Note>,
    /// Names of the sources of normal draws that stand beside the plan's Gaussian vector.
    normals: Vec<String>,
    /// Names of the sources of draws from other laws than the normal.
    draws: Vec<String>,
}

impl<'a> Lowering<'a> {
    fn new(model: &'a Model, plan: &'a Plan) -> Self {
        let mut builder = Builder::default();
        let mut parameters = BTreeMap::new();
        for (index, parameter) in model.parameters.iter().enumerate() {
            let id = builder.parameter(index);
            builder.hint(id, &parameter.name);
            parameters.insert(parameter.symbol, id);
        }
        let length = model.pool.symbol("step length", SymbolKind::Auxiliary);
        let mut lowering = Self {
            model,
            plan,
            builder,
            length,
            setup: Environment::new(parameters.clone()),
            parameters,
            step: Environment::default(),
            instant: Environment::default(),
            observation: Environment::default(),
            notes: Vec::new(),
            normals: Vec::new(),
            draws: Vec::new(),
        };
        let start = lowering.builder.start();
        let coordinates = lowering.coordinates(Phase::Step);
        lowering.step = lowering.step_environment(start, coordinates);
        lowering.instant = lowering.instant_environment();
        lowering.observation = lowering.observation_environment();
        lowering
    }

    /// What the coordinates' symbols stand for in a phase.
    fn coordinates(&mut self, phase: Phase) -> BTreeMap<Symbol, ValueId> {
        let plan = self.plan;
        let mut values = BTreeMap::new();
        for coordinate in &plan.coordinates {
            let id = self.builder.state(coordinate.state, phase);
            self.builder
                .hint(id, &self.model.states[coordinate.state].name);
            values.insert(coordinate.symbol, id);
        }
        values
    }

    /// An environment for formulas taken at `time` within a step.
    fn step_environment(
        &mut self,
        time: ValueId,
        coordinates: BTreeMap<Symbol, ValueId>,
    ) -> Environment {
        let mut bindings = self.parameters.clone();
        bindings.extend(coordinates);
        bindings.insert(self.model.time, time);
        bindings.insert(self.length, self.builder.length());
        Environment::new(bindings)
    }

    fn instant_environment(&mut self) -> Environment {
        let mut bindings = self.parameters.clone();
        bindings.insert(self.model.time, self.builder.instant());
        Environment::new(bindings)
    }

    fn observation_environment(&mut self) -> Environment {
        let mut bindings = self.parameters.clone();
        bindings.extend(self.coordinates(Phase::Observation));
        bindings.insert(self.model.time, self.builder.time());
        Environment::new(bindings)
    }

    fn in_setup(&mut self, formula: Expr) -> ValueId {
        let environment = &mut self.setup;
        Formulas {
            pool: &self.model.pool,
            builder: &mut self.builder,
            environment,
        }
        .lower(formula)
    }

    fn in_step(&mut self, formula: Expr) -> ValueId {
        let environment = &mut self.step;
        Formulas {
            pool: &self.model.pool,
            builder: &mut self.builder,
            environment,
        }
        .lower(formula)
    }

    fn at_instant(&mut self, formula: Expr) -> ValueId {
        let environment = &mut self.instant;
        Formulas {
            pool: &self.model.pool,
            builder: &mut self.builder,
            environment,
        }
        .lower(formula)
    }

    fn in_observation(&mut self, formula: Expr) -> ValueId {
        let environment = &mut self.observation;
        Formulas {
            pool: &self.model.pool,
            builder: &mut self.builder,
            environment,
        }
        .lower(formula)
    }

    /// The length of a step as a formula.
    fn length(&self) -> Expr {
        self.model.pool.var(self.length)
    }

    fn note(&mut self, slot: usize, value: ValueId, text: String) {
        self.notes.push(Note { value, slot, text });
    }

    /// The stored value of a state at the start of a step.
    fn current(&mut self, state: usize) -> ValueId {
        self.builder.state(state, Phase::Step)
    }

    /// The coordinate of a state as people write it: a formula in the state.
    fn coordinate_text(&self, state: usize) -> String {
        self.model.pool.format(self.plan.coordinates[state].forward)
    }

    /// One slot per state, each with its start and its step.
    fn slots(&mut self) -> Vec<Slot> {
        let noise = Noise::new(self);
        let mut next = BTreeMap::new();
        let plan = self.plan;
        for (index, group) in plan.groups.iter().enumerate() {
            match &group.method {
                Method::LinearGaussian(system) => {
                    self.exact_group(index, group, system, &noise, &mut next);
                }
                Method::SquareRoot(step) => {
                    let value = self.square_root_state(step, &noise);
                    next.insert(step.state, value);
                }
                Method::RandomDrift(step) => {
                    let value = self.random_drift_state(step);
                    next.insert(step.state, value);
                }
                // After the process that carries them, below.
                Method::Carried(_) => {}
                Method::LinearFlow(flow) => self.linear_flow_states(flow, &noise, &mut next),
                Method::Step(steps) => {
                    for step in steps {
                        let value = self.approximate_state(step, &noise);
                        next.insert(step.state, value);
                    }
                }
                Method::RungeKutta4(drifts) => next.extend(self.runge_kutta(drifts)),
            }
        }
        for group in &plan.groups {
            if let Method::Carried(step) = &group.method {
                let carrier = next[&step.carrier];
                next.extend(self.carried_states(step, carrier, &noise));
            }
        }
        (0..self.model.states.len())
            .map(|state| Slot {
                name: self.model.states[state].name.clone(),
                coordinate: self.coordinate_text(state),
                initial: self.initial(state),
                next: next[&state],
            })
            .collect()
    }
}
