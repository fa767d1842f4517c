//! The back ends: two spellings of one step program.
//!
//! [`interpret`] runs a program in process, an operation at a time over the lanes of a block; [`rust`]
//! writes it as Rust. Both do the same operations in the same order, so their paths agree bit for bit.

pub mod interpret;
pub mod rust;
