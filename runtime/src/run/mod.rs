//! Running a simulator: all paths, on all threads, in an order that no thread can see.

mod block;
mod order;
mod plan;

use std::fmt;
use std::io;
use std::num::NonZero;
use std::sync::atomic::{AtomicU64, Ordering};

use crate::arith::ArithmeticClass;
use crate::collect::{BlockSpan, Collector, Layout};
use crate::dispatch::{InstructionSet, Target};
use crate::error::StepError;
use crate::grid::Grid;
use crate::lane::LANES;
use crate::random::Generator;
use crate::simulator::Simulator;
use block::{Setting, Workspace};
use order::{Order, StopOnPanic};
use plan::Plan;

/// What to run. Fields that are left at their [`Default`] mean: 100,000 paths from number 0,
/// seed 0, all processors, the fused class, Threefry, the best instruction set, no progress.
#[derive(Clone, Copy)]
pub struct Run<'a> {
    /// How many paths.
    pub paths: u64,
    /// The number of the first: a part of a run has the same paths as the whole.
    pub first_path: u64,
    /// The seed.
    pub seed: u64,
    /// How many threads; 0 means as many as there are processors. No result depends on it.
    pub threads: usize,
    /// The arithmetic class that is asked for; [`Outcome::arithmetic`] is the one used.
    pub arithmetic: ArithmeticClass,
    /// The random number generator.
    pub generator: Generator,
    /// The instruction set; none, or one that the processor lacks, means the best.
    pub instruction_set: Option<InstructionSet>,
    /// Who is told how far the run is.
    pub progress: Option<&'a dyn Progress>,
}

impl Default for Run<'_> {
    fn default() -> Self {
        Run {
            paths: 100_000,
            first_path: 0,
            seed: 0,
            threads: 0,
            arithmetic: ArithmeticClass::default(),
            generator: Generator::default(),
            instruction_set: None,
            progress: None,
        }
    }
}

/// Hears how far a run is.
pub trait Progress: Sync {
    /// `done` of `total` paths are finished. Called after each block, in order.
    fn advanced(&self, done: u64, total: u64);
}

/// Paths that went wrong, each counted once under each heading.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Failures {
    /// Paths with an observed value that is infinite or not a number.
    pub non_finite: u64,
    /// Paths that left the domain of a state.
    pub left_domain: u64,
}

/// What a run gives.
#[derive(Clone, Debug)]
pub struct Outcome<T> {
    /// What the collector made of the paths.
    pub output: T,
    /// Paths that went wrong.
    pub failures: Failures,
    /// The arithmetic class that was used: unfused on a processor without the instruction.
    pub arithmetic: ArithmeticClass,
}

/// Why a run did not take place or did not end.
#[derive(Debug)]
pub enum RunError {
    /// No paths were asked for, or more than there are numbers.
    BadPathCount(u64),
    /// The coefficients of a step do not exist.
    Step {
        /// Where the step starts.
        time: f64,
        /// Its length.
        length: f64,
        /// What is wrong.
        error: StepError,
    },
    /// The coefficients of an observation do not exist.
    Observation {
        /// The time.
        time: f64,
        /// What is wrong.
        error: StepError,
    },
    /// A collector could not write.
    Output(io::Error),
}

impl fmt::Display for RunError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            RunError::BadPathCount(count) => {
                write!(
                    f,
                    "{count} paths: ask for at least one, with numbers below 2^63"
                )
            }
            RunError::Step {
                time,
                length,
                error,
            } => write!(f, "the step of length {length} from time {time}: {error}"),
            RunError::Observation { time, error } => {
                write!(f, "the observation at time {time}: {error}")
            }
            RunError::Output(error) => write!(f, "the paths could not be written: {error}"),
        }
    }
}

impl std::error::Error for RunError {
    fn source(&self) -> Option<&(dyn std::error::Error + 'static)> {
        match self {
            RunError::BadPathCount(_) => None,
            RunError::Step { error, .. } | RunError::Observation { error, .. } => Some(error),
            RunError::Output(error) => Some(error),
        }
    }
}

/// Blocks a thread may be ahead of the oldest unfinished one.
const AHEAD: u64 = 4;

/// Runs `run.paths` paths of a simulator over a grid and gives what it observes to a
/// collector. The outcome is the same, bit for bit, for any number of threads.
///
/// # Errors
/// See [`RunError`].
///
/// # Panics
/// Only if the simulator or the collector does.
pub fn simulate<S: Simulator, C: Collector>(
    simulator: &S,
    grid: &Grid,
    run: &Run<'_>,
    collector: C,
) -> Result<Outcome<C::Output>, RunError> {
    let end = run.first_path.checked_add(run.paths);
    let Some(end) = end.filter(|end| run.paths > 0 && *end < 1 << 63) else {
        return Err(RunError::BadPathCount(run.paths));
    };
    let plan = Plan::new(simulator, grid)?;
    let target = Target::new(run.instruction_set, run.arithmetic);
    let setting = Setting::new(simulator, grid, &plan, target, run);
    let layout = Layout {
        paths: run.paths,
        first_path: run.first_path,
        times: grid.observations().len(),
        quantities: setting.shape.outputs.len(),
    };
    let lanes = LANES as u64;
    let blocks = run.first_path / lanes..end.div_ceil(lanes);
    let threads = thread_count(run.threads, blocks.end - blocks.start);
    let tally = Tally {
        total: collector.total(&layout),
        failures: Failures::default(),
        done: 0,
        error: None,
    };
    let order = Order::new(blocks.start, AHEAD * threads as u64, tally);
    let next = AtomicU64::new(blocks.start);
    let work = || {
        let _guard = StopOnPanic(&order);
        let mut space = Workspace::new(simulator);
        loop {
            let index = next.fetch_add(1, Ordering::Relaxed);
            if index >= blocks.end || !order.enter(index) {
                return;
            }
            let span = BlockSpan::new(index, run.first_path, end);
            let mut part = collector.block(&layout, &span);
            let failures = setting.block(&collector, &span, &mut part, &mut space);
            let paths = span.lanes.len() as u64;
            order.deliver(index, (part, failures, paths), |tally, item| {
                tally.accept(&collector, item, run)
            });
        }
    };
    std::thread::scope(|scope| {
        for _ in 1..threads {
            scope.spawn(work);
        }
        work();
    });
    let tally = order.into_sink();
    match tally.error {
        Some(error) => Err(RunError::Output(error)),
        None => Ok(Outcome {
            output: collector.finish(tally.total),
            failures: tally.failures,
            arithmetic: target.class(),
        }),
    }
}

/// The threads to use: no more than there are blocks.
fn thread_count(asked: usize, blocks: u64) -> usize {
    let processors = || std::thread::available_parallelism().map_or(1, NonZero::get);
    let threads = if asked == 0 { processors() } else { asked };
    threads
        .min(usize::try_from(blocks).unwrap_or(usize::MAX))
        .max(1)
}

/// What the blocks delivered so far add up to.
struct Tally<T> {
    total: T,
    failures: Failures,
    done: u64,
    error: Option<io::Error>,
}

impl<T> Tally<T> {
    /// Adds the next block; false if the run must stop.
    fn accept<C: Collector<Total = T>>(
        &mut self,
        collector: &C,
        (part, failures, paths): (C::Block, Failures, u64),
        run: &Run<'_>,
    ) -> bool {
        self.failures.non_finite += failures.non_finite;
        self.failures.left_domain += failures.left_domain;
        self.done += paths;
        if let Some(progress) = run.progress {
            progress.advanced(self.done, run.paths);
        }
        self.error = collector.accept(&mut self.total, part).err();
        self.error.is_none()
    }
}
