//! One run with everything that is collected from it: the only place at which the command line meets the
//! runtime's driver.

use std::io;

use driftwright_runtime::collect::{
    CoMoments, Covariances, Moments, QuantileTable, Quantiles, Stream, Summary,
};
use driftwright_runtime::{ArithmeticClass, Failures, Grid, Run, RunError, simulate};

use super::coupled::Coupled;
use crate::back::interpret::Interpreter;

/// Bytes that exact quantiles may take; beyond that the paths are run again.
const QUANTILE_BYTES: usize = 1 << 28;

/// Takes paths as they come: the number of the first, and values of shape (paths, times, quantities).
pub(super) type Writer<'a> = Box<dyn FnMut(u64, &[f64]) -> io::Result<()> + Send + 'a>;

/// What is wanted of a run.
pub(super) struct Request<'a> {
    /// Levels of the quantiles.
    pub(super) levels: Vec<f64>,
    /// Pairs of outputs whose covariances are collected.
    pub(super) pairs: Vec<(usize, usize)>,
    /// Whether to run at half the step too, along the same paths. Outputs and pairs then stand for the
    /// steps of the grid first, and again for their halves.
    pub(super) coupled: bool,
    /// Who gets the paths themselves.
    pub(super) writer: Option<Writer<'a>>,
}

/// What was collected; a row a time.
pub(super) struct Collected {
    /// Moments of each output.
    pub(super) moments: Vec<Vec<Summary>>,
    /// Moments of each pair.
    pub(super) covariances: Vec<Vec<CoMoments>>,
    /// Quantiles of each output.
    pub(super) quantiles: QuantileTable,
    /// Paths that went wrong.
    pub(super) failures: Failures,
    /// Arithmetic class that was used.
    pub(super) arithmetic: ArithmeticClass,
}

/// Runs the paths; again where the quantiles do not fit the memory they may take.
pub(super) fn sample(
    interpreter: &Interpreter,
    grid: &Grid,
    run: &Run<'_>,
    request: Request<'_>,
) -> Result<Collected, RunError> {
    let halved;
    let (simulator, grid) = if request.coupled {
        halved = grid.halved();
        (Coupled::pair(interpreter, grid), &halved)
    } else {
        (Coupled::single(interpreter), grid)
    };
    let quantiles = Quantiles::new(request.levels, QUANTILE_BYTES);
    let covariances = Covariances::new(request.pairs);
    let stream = request.writer.map(Stream::new);
    let collector = (Moments, (covariances, (quantiles, stream)));
    let outcome = simulate(&simulator, grid, run, collector)?;
    let (moments, (covariances, (selection, _))) = outcome.output;
    Ok(Collected {
        moments,
        covariances,
        quantiles: selection.complete(&simulator, grid, run)?,
        failures: outcome.failures,
        arithmetic: outcome.arithmetic,
    })
}
