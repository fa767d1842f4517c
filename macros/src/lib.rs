//! The macro.
