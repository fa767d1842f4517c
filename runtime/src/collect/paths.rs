//! Whole paths: kept in memory, or handed to a writer in order.

use std::io;
use std::sync::{Mutex, PoisonError};

use super::{BlockSpan, Collector, Layout};
use crate::lane::Lane;

/// Observed values in C order, shape (paths, times, quantities).
#[derive(Clone, Debug, PartialEq)]
pub struct PathArray {
    /// The shape; `layout.first_path` is the number of the first row's path.
    pub layout: Layout,
    /// The values.
    pub values: Vec<f64>,
}

impl PathArray {
    /// The value of a quantity at a time; the path counts from the first of the run.
    ///
    /// # Panics
    /// If an index is out of range.
    #[must_use]
    pub fn get(&self, path: usize, time: usize, quantity: usize) -> f64 {
        self.values[(path * self.layout.times + time) * self.layout.quantities + quantity]
    }
}

/// The values of a block, shape (lanes, times, quantities).
#[derive(Debug)]
pub struct PathsBlock {
    span: BlockSpan,
    layout: Layout,
    values: Vec<f64>,
}

impl PathsBlock {
    fn new(layout: &Layout, span: &BlockSpan) -> PathsBlock {
        PathsBlock {
            span: span.clone(),
            layout: *layout,
            values: vec![0.0; span.lanes.len() * layout.cells()],
        }
    }

    /// Writes one observation into its place in every path.
    #[inline(always)]
    fn observe(&mut self, time: usize, outputs: &[Lane]) {
        let quantities = self.layout.quantities;
        let cells = self.layout.cells();
        for (q, output) in outputs.iter().enumerate() {
            let offset = time * quantities + q;
            let live = &output[self.span.lanes.clone()];
            let places = self.values.iter_mut().skip(offset).step_by(cells);
            for (place, value) in places.zip(live) {
                *place = *value;
            }
        }
    }
}

/// Keeps all observed values in memory.
#[derive(Clone, Copy, Debug, Default)]
pub struct Paths;

impl Collector for Paths {
    type Block = PathsBlock;
    type Total = PathArray;
    type Output = PathArray;

    fn total(&self, layout: &Layout) -> PathArray {
        PathArray {
            layout: *layout,
            values: Vec::new(),
        }
    }

    fn block(&self, layout: &Layout, span: &BlockSpan) -> PathsBlock {
        PathsBlock::new(layout, span)
    }

    #[inline(always)]
    fn observe(&self, block: &mut PathsBlock, time: usize, outputs: &[Lane]) {
        block.observe(time, outputs);
    }

    fn accept(&self, total: &mut PathArray, block: PathsBlock) -> io::Result<()> {
        total.values.extend(block.values);
        Ok(())
    }

    fn finish(self, total: PathArray) -> PathArray {
        total
    }
}

/// Hands the observed values to a writer, block by block in the order of the paths, so that
/// a file of any size is written in little memory.
///
/// The writer gets the number of the first path and the values in C order, shape (paths,
/// times, quantities). It comes back as the collector's output.
///
/// ```no_run
/// # use driftwright_runtime::{Grid, Run, RunError, Simulator, collect::Stream, simulate};
/// # fn f(simulator: impl Simulator, grid: Grid) -> Result<(), RunError> {
/// let write = |first_path: u64, values: &[f64]| -> std::io::Result<()> {
///     println!("from path {first_path}: {values:?}");
///     Ok(())
/// };
/// simulate(&simulator, &grid, &Run::default(), Stream::new(write))?;
/// # Ok(()) }
/// ```
#[derive(Debug)]
pub struct Stream<W> {
    writer: Mutex<W>,
}

impl<W: FnMut(u64, &[f64]) -> io::Result<()> + Send> Stream<W> {
    /// A collector around a writer.
    pub fn new(writer: W) -> Self {
        Stream {
            writer: Mutex::new(writer),
        }
    }
}

impl<W: FnMut(u64, &[f64]) -> io::Result<()> + Send> Collector for Stream<W> {
    type Block = PathsBlock;
    type Total = ();
    type Output = W;

    fn total(&self, _layout: &Layout) {}

    fn block(&self, layout: &Layout, span: &BlockSpan) -> PathsBlock {
        PathsBlock::new(layout, span)
    }

    #[inline(always)]
    fn observe(&self, block: &mut PathsBlock, time: usize, outputs: &[Lane]) {
        block.observe(time, outputs);
    }

    fn accept(&self, _total: &mut (), block: PathsBlock) -> io::Result<()> {
        let mut writer = self.writer.lock().unwrap_or_else(PoisonError::into_inner);
        writer(block.span.first_path(), &block.values)
    }

    fn finish(self, _total: ()) -> W {
        let writer = self.writer.into_inner();
        writer.unwrap_or_else(PoisonError::into_inner)
    }
}
