//! One block of paths, from the start to the last observation.

use super::plan::Plan;
use super::{Failures, Run};
use crate::arith::Arith;
use crate::collect::{BlockSpan, Collector};
use crate::dispatch::{Target, Task};
use crate::grid::Grid;
use crate::lane::{LANES, Lane};
use crate::random::{Address, Generator, fill_normals};
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
pub(super) struct Setting<'a, S, C> {
    pub(super) simulator: &'a S,
    pub(super) shape: Shape<'a>,
    pub(super) grid: &'a Grid,
    pub(super) plan: &'a Plan,
    pub(super) collector: &'a C,
    pub(super) target: Target,
    pub(super) seed: u64,
    pub(super) generator: Generator,
}

impl<'a, S: Simulator, C: Collector> Setting<'a, S, C> {
    pub(super) fn new(
        simulator: &'a S,
        grid: &'a Grid,
        plan: &'a Plan,
        collector: &'a C,
        target: Target,
        run: &Run<'_>,
    ) -> Self {
        Setting {
            simulator,
            shape: simulator.shape(),
            grid,
            plan,
            collector,
            target,
            seed: run.seed,
            generator: run.generator,
        }
    }

    /// Runs one block.
    pub(super) fn block(
        &self,
        span: &BlockSpan,
        part: &mut C::Block,
        work: &mut Workspace,
    ) -> Failures {
        self.target.run(BlockTask {
            setting: self,
            span,
            part,
            work,
        })
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

struct BlockTask<'a, 'b, S, C: Collector> {
    setting: &'a Setting<'b, S, C>,
    span: &'a BlockSpan,
    part: &'a mut C::Block,
    work: &'a mut Workspace,
}

impl<S: Simulator, C: Collector> Task for BlockTask<'_, '_, S, C> {
    type Output = Failures;

    #[inline(always)]
    fn run<A: Arith>(self) -> Failures {
        let setting = self.setting;
        let work = self.work;
        let first_path = self.span.block * LANES as u64;
        let sources = setting.shape.sources.len();
        for (lane, &value) in work.states.iter_mut().zip(&work.start) {
            *lane = Lane::splat(value);
        }
        let mut not_finite = Lane::ZERO;
        let mut step = 0;
        for (time, observation) in setting.grid.observations().iter().enumerate() {
            while step < observation.steps_before {
                if step % 2 == 0 {
                    setting.draw(step / 2, first_path, &mut work.noise);
                }
                let noise = &work.noise[step % 2 * sources..][..sources];
                let values = setting.plan.step(step);
                let (states, scratch) = (&mut work.states, &mut work.scratch);
                setting.simulator.step::<A>(values, states, noise, scratch);
                step += 1;
            }
            let values = setting.plan.observation(time);
            let (outputs, scratch) = (&mut work.outputs, &mut work.scratch);
            setting
                .simulator
                .observe::<A>(values, &work.states, outputs, scratch);
            mark_not_finite(outputs, &mut not_finite);
            setting.collector.observe(self.part, time, outputs);
        }
        let live = self.span.lanes.clone();
        let flag = setting.shape.left_domain.map(|slot| &work.states[slot]);
        Failures {
            non_finite: count(&not_finite, live.clone()),
            left_domain: flag.map_or(0, |lane| count(lane, live)),
        }
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
fn count(lane: &Lane, live: std::ops::Range<usize>) -> u64 {
    lane[live].iter().filter(|mark| **mark != 0.0).count() as u64
}
