//! Tests of the formula algebra.

mod basics;
