//! From a TOML file to the typed model: spanned tree, formulas, names.

pub mod formula;
mod suggest;
pub mod text;
