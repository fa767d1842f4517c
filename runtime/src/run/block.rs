//! One block of paths, from the start to the last observation.

use std::ops::Range;

use super::plan::Plan;
use super::{Failures, Run};
use crate::arith::Arith;
use crate::collect::{BlockSpan, Collector};
use crate::dispatch::{Target, Task};
use crate::grid::Grid;
use crate::lane::{LANES, Lane};
use crate::random::{Address, Draws, Generator, fill_normals};
use crate::simulator::{Shape, Simulator};

/// The memory a thread steps in; allocated once.
pub(super) struct Workspace {
    start: Vec<f64>,
    states: Vec<Lane>,
    noise: Vec<Lane>,
    outputs: Vec<Lane>,
    scratch: Vec<Lane>,
}

impl Workspace {
    pub(super) fn new<S: Simulator>(simulator: &S) -> Workspace {
        let shape = simulator.shape();
        let lanes = |count| vec![Lane::ZERO; count];
        let mut start = vec![0.0; shape.states];
        simulator.start(&mut start);
        Workspace {
            start,
            states: lanes(shape.states),
            noise: lanes(2 * shape.sources.len()),
            outputs: lanes(shape.outputs.len()),
            scratch: lanes(shape.step_scratch.max(shape.observation_scratch)),
        }
    }
}

/// What is the same for all blocks of a run.
///
/// It does not know the collector: stepping and collecting are dispatched apart, so that a
/// program with several simulators and several collectors holds the sum of their bodies for
/// each instruction set and not the product.
pub(super) struct Setting<'a, S> {
    pub(super) simulator: &'a S,
    pub(super) shape: Shape<'a>,
    pub(super) grid: &'a Grid,
    pub(super) plan: &'a Plan,
    pub(super) target: Target,
    pub(super) seed: u64,
    pub(super) generator: Generator,
}

impl<'a, S: Simulator> Setting<'a, S> {
    pub(super) fn new(
        simulator: &'a S,
        grid: &'a Grid,
        plan: &'a Plan,
        target: Target,
        run: &Run<'_>,
    ) -> Self {
        Setting {
            simulator,
            shape: simulator.shape(),
            grid,
            plan,
            target,
            seed: run.seed,
            generator: run.generator,
        }
    }

    /// Runs one block.
    pub(super) fn block<C: Collector>(
        &self,
        collector: &C,
        span: &BlockSpan,
        part: &mut C::Block,
        work: &mut Workspace,
    ) -> Failures {
        let first_path = span.block * LANES as u64;
        for (lane, &value) in work.states.iter_mut().zip(&work.start) {
            *lane = Lane::splat(value);
        }
        let mut not_finite = Lane::ZERO;
        let mut step = 0;
        for (time, observation) in self.grid.observations().iter().enumerate() {
            let steps = step..observation.steps_before;
            step = observation.steps_before.max(step);
            self.target.run(Advance {
                setting: self,
                first_path,
                steps,
                time,
                work,
                not_finite: &mut not_finite,
            });
            let outputs = &work.outputs;
            self.target.run(Collect {
                collector,
                part,
                time,
                outputs,
            });
        }
        let live = span.lanes.clone();
        let flag = self.shape.left_domain.map(|slot| &work.states[slot]);
        Failures {
            non_finite: count(&not_finite, live.clone()),
            left_domain: flag.map_or(0, |lane| count(lane, live)),
        }
    }

    /// Draws the normals of the steps `2 block` and `2 block + 1` from all sources.
    fn draw(&self, block: usize, first_path: u64, noise: &mut [Lane]) {
        let (even, odd) = noise.split_at_mut(self.shape.sources.len());
        for (source, pair) in self.shape.sources.iter().zip(even.iter_mut().zip(odd)) {
            let address = Address {
                seed: self.seed,
                source: source.id,
                block: block as u64,
                attempt: 0,
            };
            let pair = [pair.0, pair.1];
            fill_normals(self.target, self.generator, &address, first_path, pair);
        }
    }
}

/// The steps up to an observation, and the observation.
struct Advance<'a, 'b, S> {
    setting: &'a Setting<'b, S>,
    first_path: u64,
    steps: Range<usize>,
    time: usize,
    work: &'a mut Workspace,
    not_finite: &'a mut Lane,
}

impl<S: Simulator> Task for Advance<'_, '_, S> {
    type Output = ();

    #[inline(always)]
    fn run<A: Arith>(self) {
        let setting = self.setting;
        let work = self.work;
        let sources = setting.shape.sources.len();
        for step in self.steps {
            if step % 2 == 0 {
                setting.draw(step / 2, self.first_path, &mut work.noise);
            }
            let noise = &work.noise[step % 2 * sources..][..sources];
            let values = setting.plan.step(step);
            let states = &mut work.states;
            let scratch = &mut work.scratch[..setting.shape.step_scratch];
            let (seed, generator) = (setting.seed, setting.generator);
            let draws = Draws::on(
                setting.target,
                seed,
                generator,
                step as u64,
                self.first_path,
            );
            setting
                .simulator
                .step::<A>(values, states, noise, &draws, scratch);
        }
        let values = setting.plan.observation(self.time);
        let outputs = &mut work.outputs;
        let scratch = &mut work.scratch[..setting.shape.observation_scratch];
        setting
            .simulator
            .observe::<A>(values, &work.states, outputs, scratch);
        mark_not_finite(outputs, self.not_finite);
    }
}

/// Handing what was observed to the collector.
struct Collect<'a, C: Collector> {
    collector: &'a C,
    part: &'a mut C::Block,
    time: usize,
    outputs: &'a [Lane],
}

impl<C: Collector> Task for Collect<'_, C> {
    type Output = ();

    #[inline(always)]
    fn run<A: Arith>(self) {
        self.collector.observe(self.part, self.time, self.outputs);
    }
}

/// Adds zero times each output: 0 where all are finite, NaN where one is not.
#[inline(always)]
fn mark_not_finite(outputs: &[Lane], marks: &mut Lane) {
    for output in outputs {
        for i in 0..LANES {
            marks[i] += output[i] * 0.0;
        }
    }
}

/// How many of the live lanes are not zero.
fn count(lane: &Lane, live: Range<usize>) -> u64 {
    lane[live].iter().filter(|mark| **mark != 0.0).count() as u64
}
