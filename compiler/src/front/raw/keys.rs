//! The keys of each table, once: for reading, for hints and for the schema.

/// Tables of a file.
pub(in crate::front) const FILE: &[&str] = &[
    "model",
    "parameters",
    "assumptions",
    "correlation",
    "states",
    "derived",
    "where",
    "readouts",
    "claims",
];
/// `[model]`
pub(in crate::front) const MODEL: &[&str] =
    &["name", "title", "about", "time_unit", "calculus", "drivers"];
/// A parameter.
pub(in crate::front) const PARAMETER: &[&str] = &["value", "unit", "range", "about"];
/// `[states.X]`
pub(in crate::front) const STATE: &[&str] = &[
    "about",
    "unit",
    "initial",
    "drift",
    "diffusion",
    "domain",
    "at_edge",
    "through",
    "scheme",
];
/// `at_edge = { ... }`
pub(in crate::front) const EDGES: &[&str] = &["lower", "upper"];
/// `[derived.X]` and `[readouts.X]`
pub(in crate::front) const NAMED: &[&str] = &["formula", "unit", "about"];
/// A claim; the last is the claimed value.
pub(in crate::front) const CLAIM: &[&str] = &[
    "drift_of",
    "diffusion_of",
    "martingale",
    "mean_of",
    "variance_of",
    "covariance_of",
    "law_of",
    "is",
];

/// Values of `calculus`.
pub(in crate::front) const CALCULI: &[&str] = &["ito", "stratonovich"];
/// Values of `at_edge`.
pub(in crate::front) const EDGE_WORDS: &[&str] = &["absorb", "reflect", "as_equation"];
/// Values of a claim's `is` under `law_of`.
pub(in crate::front) const LAWS: &[&str] = &[
    "normal",
    "lognormal",
    "noncentral_chi_square",
    "transformed_noncentral_chi_square",
    "absorbed_noncentral_chi_square",
    "gaussian_mixture",
    "transformed_gaussian_mixture",
    "bessel_with_drift",
    "transformed_bessel_with_drift",
    "joint_normal",
    "transformed_normal",
    "deterministic",
];
