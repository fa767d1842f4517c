//! What the cross-crate tests share: parameter values, laws from the literature, statistics of
//! paths, and families of tests with a threshold of their own.

pub mod checks;
pub mod interpret;
pub mod laws;
pub mod reference;
pub mod sums;
pub mod values;
