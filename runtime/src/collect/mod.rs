//! Collectors: what is made of the observed values.
//!
//! A collector sees each block of paths on the thread that runs it, and then gets the
//! blocks one by one in the order of their path numbers, so that its result does not
//! depend on the number of threads. Pairs of collectors are collectors.

mod covariances;
mod moments;
mod paths;
mod quantiles;
mod selection;
mod summary;
mod tree;

use std::io;
use std::ops::Range;

pub use covariances::{CoMoments, Covariances};
pub use moments::Moments;
pub use paths::{PathArray, Paths, Stream};
pub use quantiles::{QuantileTable, Quantiles};
pub use selection::Selection;
pub use summary::Summary;

use crate::lane::{LANES, Lane};

/// The size of what a run observes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Layout {
    /// How many paths.
    pub paths: u64,
    /// The number of the first.
    pub first_path: u64,
    /// How many observation times.
    pub times: usize,
    /// How many quantities are observed at each.
    pub quantities: usize,
}

impl Layout {
    /// The number of pairs of a time and a quantity; pair `(t, q)` has index `t * quantities + q`.
    #[must_use]
    pub fn cells(&self) -> usize {
        self.times * self.quantities
    }
}

/// A block of paths, and which of its lanes belong to the run.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BlockSpan {
    /// The absolute number of the block: its lane 0 is path `block * LANES`.
    pub block: u64,
    /// The lanes that belong to the run: all, except in its first and last block.
    pub lanes: Range<usize>,
}

impl BlockSpan {
    /// Block `block` of a run over the paths from `first` to `end` (excluded).
    pub(crate) fn new(block: u64, first: u64, end: u64) -> BlockSpan {
        let start = block * LANES as u64;
        let lane = |path: u64| path.saturating_sub(start).min(LANES as u64) as usize;
        BlockSpan {
            block,
            lanes: lane(first)..lane(end),
        }
    }

    /// The number of the first path of the run in this block.
    #[must_use]
    pub fn first_path(&self) -> u64 {
        self.block * LANES as u64 + self.lanes.start as u64
    }
}

/// Something that takes in the observed values of a run.
pub trait Collector: Sync {
    /// What a block of paths contributes.
    type Block: Send;
    /// What all blocks so far add up to.
    type Total: Send;
    /// What comes out.
    type Output;

    /// The total before the first block.
    fn total(&self, layout: &Layout) -> Self::Total;

    /// An empty contribution.
    fn block(&self, layout: &Layout, span: &BlockSpan) -> Self::Block;

    /// Takes in the observed quantities of a block at observation `time` (an index). Should be
    /// `#[inline(always)]`, to be compiled for the instruction set of the run.
    fn observe(&self, block: &mut Self::Block, time: usize, outputs: &[Lane]);

    /// Adds the next block, in the order of path numbers.
    ///
    /// # Errors
    /// The values could not be written; the run stops.
    fn accept(&self, total: &mut Self::Total, block: Self::Block) -> io::Result<()>;

    /// Ends the collection.
    fn finish(self, total: Self::Total) -> Self::Output;
}

impl<A: Collector, B: Collector> Collector for (A, B) {
    type Block = (A::Block, B::Block);
    type Total = (A::Total, B::Total);
    type Output = (A::Output, B::Output);

    fn total(&self, layout: &Layout) -> Self::Total {
        (self.0.total(layout), self.1.total(layout))
    }

    fn block(&self, layout: &Layout, span: &BlockSpan) -> Self::Block {
        (self.0.block(layout, span), self.1.block(layout, span))
    }

    #[inline(always)]
    fn observe(&self, block: &mut Self::Block, time: usize, outputs: &[Lane]) {
        self.0.observe(&mut block.0, time, outputs);
        self.1.observe(&mut block.1, time, outputs);
    }

    fn accept(&self, total: &mut Self::Total, block: Self::Block) -> io::Result<()> {
        self.0.accept(&mut total.0, block.0)?;
        self.1.accept(&mut total.1, block.1)
    }

    fn finish(self, total: Self::Total) -> Self::Output {
        (self.0.finish(total.0), self.1.finish(total.1))
    }
}

/// A collector that may be left out.
impl<A: Collector> Collector for Option<A> {
    type Block = Option<A::Block>;
    type Total = Option<A::Total>;
    type Output = Option<A::Output>;

    fn total(&self, layout: &Layout) -> Self::Total {
        self.as_ref().map(|inner| inner.total(layout))
    }

    fn block(&self, layout: &Layout, span: &BlockSpan) -> Self::Block {
        self.as_ref().map(|inner| inner.block(layout, span))
    }

    #[inline(always)]
    fn observe(&self, block: &mut Self::Block, time: usize, outputs: &[Lane]) {
        if let (Some(inner), Some(block)) = (self, block) {
            inner.observe(block, time, outputs);
        }
    }

    fn accept(&self, total: &mut Self::Total, block: Self::Block) -> io::Result<()> {
        match (self, total, block) {
            (Some(inner), Some(total), Some(block)) => inner.accept(total, block),
            _ => Ok(()),
        }
    }

    fn finish(self, total: Self::Total) -> Self::Output {
        self.zip(total).map(|(inner, total)| inner.finish(total))
    }
}
