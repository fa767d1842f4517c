//! The contract between a compiled model and the driver that runs it.

use std::borrow::Cow;

use crate::arith::Arith;
use crate::error::StepError;
use crate::lane::Lane;
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
    /// standard normals per source.
    fn step<A: Arith>(
        &self,
        values: &[f64],
        states: &mut [Lane],
        noise: &[Lane],
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
}
