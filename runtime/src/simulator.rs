//! The contract between a compiled model and the driver that runs it.

use std::borrow::Cow;

use crate::arith::Arith;
use crate::error::StepError;
use crate::fact::Fact;
use crate::lane::Lane;
use crate::law::Law;
use crate::random::Draws;
use crate::source::Source;

/// The sizes and names of a simulator.
#[derive(Clone, Copy, Debug)]
pub struct Shape<'a> {
    /// State slots of a path: the coordinates stepped, the flag of a left domain included.
    pub states: usize,
    /// Numbers that one step needs and that are the same on every path.
    pub step_values: usize,
    /// Lanes of scratch space for a step; 0 in generated code.
    pub step_scratch: usize,
    /// The sources of randomness: a step gets one lane of standard normals from each, in this order.
    pub sources: &'a [Source],
    /// The names of the observed quantities, in the order of the outputs.
    pub outputs: &'a [Cow<'static, str>],
    /// Numbers that one observation needs and that are the same on every path.
    pub observation_values: usize,
    /// Lanes of scratch space for an observation; 0 in generated code.
    pub observation_scratch: usize,
    /// The state slot that is 0.0, or 1.0 once the path has left its domain.
    pub left_domain: Option<usize>,
    /// False if step values depend on the length of the step only.
    pub time_dependent: bool,
    /// True if some scheme is approximate and so needs a step size.
    pub approximate: bool,
}

/// A model with its parameters, ready to be stepped.
///
/// `step` and `observe` are `#[inline(always)]` in every implementation: the driver is
/// compiled for several instruction sets, and only what is inlined into it is.
///
/// ```
/// use std::borrow::Cow;
/// use driftwright_runtime::{
///     Arith, Grid, LANES, Lane, Run, Shape, Simulator, Source, StepError, collect::Moments,
///     random::Draws, simulate,
/// };
///
/// /// Brownian motion with a volatility.
/// struct Motion { sigma: f64 }
///
/// static SOURCES: [Source; 1] = [Source::new("W")];
/// static OUTPUTS: [Cow<'static, str>; 1] = [Cow::Borrowed("X")];
///
/// impl Simulator for Motion {
///     fn shape(&self) -> Shape<'_> {
///         Shape {
///             states: 1, step_values: 1, step_scratch: 0, sources: &SOURCES, outputs: &OUTPUTS,
///             observation_values: 0, observation_scratch: 0, left_domain: None,
///             time_dependent: false, approximate: false,
///         }
///     }
///     fn start(&self, states: &mut [f64]) {
///         states[0] = 0.0;
///     }
///     fn step_values(&self, _start: f64, length: f64, values: &mut [f64]) -> Result<(), StepError> {
///         values[0] = self.sigma * length.sqrt();
///         Ok(())
///     }
///     fn observation_values(&self, _time: f64, _values: &mut [f64]) -> Result<(), StepError> {
///         Ok(())
///     }
///     #[inline(always)]
///     fn step<A: Arith>(
///         &self, values: &[f64], x: &mut [Lane], noise: &[Lane], _: &Draws, _: &mut [Lane],
///     ) {
///         for i in 0..LANES {
///             x[0][i] = A::mul_add(values[0], noise[0][i], x[0][i]);
///         }
///     }
///     #[inline(always)]
///     fn observe<A: Arith>(&self, _: &[f64], x: &[Lane], outputs: &mut [Lane], _: &mut [Lane]) {
///         outputs[0] = x[0];
///     }
/// }
///
/// let grid = Grid::new(&[1.0, 2.0], None).unwrap();
/// let run = Run { paths: 10_000, seed: 7, ..Run::default() };
/// let outcome = simulate(&Motion { sigma: 0.3 }, &grid, &run, Moments).unwrap();
/// let last = outcome.output[1][0];
/// assert!((last.variance() - 0.18).abs() < 4.0 * last.variance_std_error());
/// ```
pub trait Simulator: Sync {
    /// Sizes and names; constant for the life of the simulator.
    fn shape(&self) -> Shape<'_>;

    /// Writes the coordinates at time 0 (`shape().states` of them; a flag slot gets 0).
    fn start(&self, states: &mut [f64]);

    /// Computes the step values of the step from `start` to `start + length`. Called while
    /// a run is prepared, never while stepping; always in unfused arithmetic.
    ///
    /// # Errors
    /// The coefficients of the step do not exist, for instance because a covariance is
    /// not positive semidefinite.
    fn step_values(&self, start: f64, length: f64, values: &mut [f64]) -> Result<(), StepError>;

    /// Computes the values an observation at `time` needs, likewise while a run is prepared.
    ///
    /// # Errors
    /// As for [`Simulator::step_values`].
    fn observation_values(&self, time: f64, values: &mut [f64]) -> Result<(), StepError>;

    /// Advances all paths of a block by one step. `noise` holds one lane of independent
    /// standard normals per source; `draws` gives what follows other laws.
    fn step<A: Arith>(
        &self,
        values: &[f64],
        states: &mut [Lane],
        noise: &[Lane],
        draws: &Draws,
        scratch: &mut [Lane],
    );

    /// Computes the observed quantities of all paths of a block.
    fn observe<A: Arith>(
        &self,
        values: &[f64],
        states: &[Lane],
        outputs: &mut [Lane],
        scratch: &mut [Lane],
    );

    /// The law of a state, by its place among the outputs, at the end of a step from time `start` on that takes `length > 0`,
    /// given its value `before`. None where the state has no exact law by itself that has a name. Where the noise vanishes at
    /// the parameters, nothing is a number that would divide by it.
    fn law(&self, state: usize, before: f64, start: f64, length: f64) -> Option<Box<dyn Law>> {
        let _ = (state, before, start, length);
        None
    }

    /// The facts of the model that hang on parameter values, and whether they hold at these.
    fn facts(&self) -> Vec<Fact> {
        Vec::new()
    }
}
