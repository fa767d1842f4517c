//! driftwright: a compiler from models written as stochastic differential equations (TOML) to the
//! Rust code that simulates them, with the derivation a reviewer can sign.
//!
//! A model flows one way, through modules that each do one thing: [`front`] reads and resolves,
//! [`calculus`] applies Ito's rule, [`analysis`] finds exact laws and facts, [`scheme`] chooses how
//! each state is stepped, [`program`] lowers the plan to a step program, [`back`] spells it as Rust or
//! interprets it, [`report`] shows the derivation. [`pipeline`] runs the passes in order; [`meaning`] compares versions of a
//! model and keeps sign-offs.

pub mod analysis;
pub mod back;
pub mod build;
pub mod calculus;
#[cfg(feature = "cli")]
pub mod cli;
pub mod diagnostic;
pub mod front;
pub mod meaning;
pub mod model;
pub mod pipeline;
pub mod program;
pub mod report;
pub mod scheme;
pub mod source;
pub mod symbolic;

pub use diagnostic::{Code, Diagnostic, Severity};
pub use model::{Model, SchemeName};
pub use pipeline::{Compilation, Compiled, compile};
pub use program::Program;
pub use scheme::Plan;
pub use source::{SourceFile, Span};
pub use symbolic::{Expr, Pool};
