//! Lanes: one value of 256 paths, the unit in which everything is computed.

use std::ops::{Deref, DerefMut};

/// Paths in a block. Blocks are aligned to absolute path numbers: path `k` is lane
/// `k % LANES` of block `k / LANES`.
pub const LANES: usize = 256;

/// One value of each path of a block, aligned to a cache line.
#[derive(Clone, Copy, Debug, PartialEq)]
#[repr(C, align(64))]
pub struct Lane(pub [f64; LANES]);

impl Lane {
    /// All paths at zero.
    pub const ZERO: Lane = Lane([0.0; LANES]);

    /// The same value on every path.
    #[inline(always)]
    #[must_use]
    pub const fn splat(value: f64) -> Lane {
        Lane([value; LANES])
    }
}

impl Default for Lane {
    fn default() -> Self {
        Lane::ZERO
    }
}

impl Deref for Lane {
    type Target = [f64; LANES];

    #[inline(always)]
    fn deref(&self) -> &Self::Target {
        &self.0
    }
}

impl DerefMut for Lane {
    #[inline(always)]
    fn deref_mut(&mut self) -> &mut Self::Target {
        &mut self.0
    }
}
