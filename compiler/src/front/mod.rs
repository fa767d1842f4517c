//! From a TOML file to the typed model: spanned tree, formulas, names.
