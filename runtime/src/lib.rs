//! The runtime.
