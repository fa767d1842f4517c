//! Sample moments of each quantity at each time.

use std::io;

use super::summary::Summary;
use super::tree::Tree;
use super::{BlockSpan, Collector, Layout};
use crate::lane::Lane;

/// Collects a [`Summary`] of each quantity at each time.
#[derive(Clone, Copy, Debug, Default)]
pub struct Moments;

/// The summaries of a block.
#[derive(Debug)]
pub struct MomentsBlock {
    span: BlockSpan,
    cells: Vec<Summary>,
}

/// The summaries of all blocks so far.
#[derive(Debug)]
pub struct MomentsTotal {
    tree: Tree<Summary>,
    quantities: usize,
}

impl Collector for Moments {
    type Block = MomentsBlock;
    type Total = MomentsTotal;
    /// One row a time, with one summary a quantity.
    type Output = Vec<Vec<Summary>>;

    fn total(&self, layout: &Layout) -> MomentsTotal {
        MomentsTotal {
            tree: Tree::new(),
            quantities: layout.quantities,
        }
    }

    fn block(&self, layout: &Layout, span: &BlockSpan) -> MomentsBlock {
        MomentsBlock {
            span: span.clone(),
            cells: Vec::with_capacity(layout.cells()),
        }
    }

    #[inline(always)]
    fn observe(&self, block: &mut MomentsBlock, _time: usize, outputs: &[Lane]) {
        for output in outputs {
            let summary = Summary::of_lane(output, block.span.lanes.clone());
            block.cells.push(summary);
        }
    }

    fn accept(&self, total: &mut MomentsTotal, block: MomentsBlock) -> io::Result<()> {
        total.tree.push(block.span.block, block.cells);
        Ok(())
    }

    fn finish(self, total: MomentsTotal) -> Vec<Vec<Summary>> {
        let cells = total.tree.finish();
        let rows = cells.chunks(total.quantities.max(1));
        rows.map(<[Summary]>::to_vec).collect()
    }
}
