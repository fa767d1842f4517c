//! Sample quantiles, exact in bounded memory.

use std::io;

use super::selection::Selection;
use super::{BlockSpan, Collector, Layout};
use crate::grid::Grid;
use crate::lane::Lane;
use crate::run::{Run, RunError, simulate};
use crate::simulator::Simulator;

/// Collects what is needed for sample quantiles; its output is a [`Selection`].
///
/// ```no_run
/// # use driftwright_runtime::{Grid, Run, RunError, Simulator, collect::Quantiles, simulate};
/// # fn f(simulator: impl Simulator, grid: Grid) -> Result<(), RunError> {
/// let run = Run::default();
/// let quantiles = Quantiles::new(vec![0.05, 0.5, 0.95], 1 << 30);
/// let selection = simulate(&simulator, &grid, &run, quantiles)?.output;
/// let table = selection.complete(&simulator, &grid, &run)?;
/// println!("median at the first time: {}", table.get(0, 0, 1));
/// # Ok(()) }
/// ```
#[derive(Clone, Debug)]
pub struct Quantiles {
    probabilities: Vec<f64>,
    budget: usize,
    resumed: Option<Selection>,
}

impl Quantiles {
    /// Quantiles for these probabilities (cut to `[0, 1]`), in about `budget` bytes.
    #[must_use]
    pub fn new(probabilities: Vec<f64>, budget: usize) -> Quantiles {
        let cut = |p: f64| if p > 0.0 { p.min(1.0) } else { 0.0 };
        Quantiles {
            probabilities: probabilities.into_iter().map(cut).collect(),
            budget,
            resumed: None,
        }
    }

    /// A further pass of a selection.
    fn resume(selection: Selection) -> Quantiles {
        Quantiles {
            probabilities: Vec::new(),
            budget: 0,
            resumed: Some(selection),
        }
    }
}

/// The values of a block, one run of lanes for each cell.
#[derive(Debug)]
pub struct QuantilesBlock {
    span: BlockSpan,
    values: Vec<f64>,
}

impl QuantilesBlock {
    fn new(layout: &Layout, span: &BlockSpan) -> QuantilesBlock {
        QuantilesBlock {
            span: span.clone(),
            values: Vec::with_capacity(layout.cells() * span.lanes.len()),
        }
    }

    #[inline(always)]
    fn observe(&mut self, outputs: &[Lane]) {
        for output in outputs {
            let live = self.span.lanes.clone();
            self.values.extend_from_slice(&output[live]);
        }
    }
}

impl Collector for Quantiles {
    type Block = QuantilesBlock;
    type Total = Selection;
    type Output = Selection;

    fn total(&self, layout: &Layout) -> Selection {
        match &self.resumed {
            Some(selection) => selection.clone(),
            None => Selection::new(layout, &self.probabilities, self.budget),
        }
    }

    fn block(&self, layout: &Layout, span: &BlockSpan) -> QuantilesBlock {
        QuantilesBlock::new(layout, span)
    }

    #[inline(always)]
    fn observe(&self, block: &mut QuantilesBlock, _time: usize, outputs: &[Lane]) {
        block.observe(outputs);
    }

    fn accept(&self, total: &mut Selection, block: QuantilesBlock) -> io::Result<()> {
        total.count(&block.values);
        Ok(())
    }

    fn finish(self, total: Selection) -> Selection {
        total.passed()
    }
}

impl Selection {
    /// Makes the passes that are still needed (none if the values were kept) and returns
    /// the quantiles. The arguments are those of the first pass.
    ///
    /// # Errors
    /// Those of [`simulate`].
    pub fn complete<S: Simulator>(
        mut self,
        simulator: &S,
        grid: &Grid,
        run: &Run<'_>,
    ) -> Result<QuantileTable, RunError> {
        while self.needs_another_pass() {
            self = simulate(simulator, grid, run, Quantiles::resume(self))?.output;
        }
        Ok(QuantileTable {
            quantities: self.quantities(),
            cells: self.quantiles(),
        })
    }
}

/// Sample quantiles of each quantity at each time.
#[derive(Clone, Debug, PartialEq)]
pub struct QuantileTable {
    quantities: usize,
    cells: Vec<Vec<f64>>,
}

impl QuantileTable {
    /// The quantile for the probability of index `probability`.
    ///
    /// # Panics
    /// If an index is out of range.
    #[must_use]
    pub fn get(&self, time: usize, quantity: usize, probability: usize) -> f64 {
        self.cells[time * self.quantities + quantity][probability]
    }
}
