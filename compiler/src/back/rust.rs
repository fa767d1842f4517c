//! Rust source of a step program.
