//! Shared helpers of the cross-crate tests.

pub mod harness;
