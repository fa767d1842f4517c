//! The law of a state after a step, given its value before: mean, variance, density and distribution function.
//!
//! Generated simulators construct these for states with an exact scalar law. They are for single values, such as a
//! price from a distribution function or a likelihood, not for the loop over paths; all arithmetic is unfused.

mod chi_square;
mod gamma;
mod image;
mod mixture;
mod normal;

pub use chi_square::{ChiSquare, noncentral_cdf};
pub use image::Image;
pub use mixture::Mixture;
pub use normal::{Lognormal, Normal};

/// The law of one number.
pub trait Law {
    /// The mean.
    fn mean(&self) -> f64;

    /// The variance.
    fn variance(&self) -> f64;

    /// The probability of a value of at most `x`.
    fn cdf(&self, x: f64) -> f64;

    /// The density at `x`; beside an atom that of the rest.
    fn density(&self, x: f64) -> f64;

    /// The mean of a function, by quadrature: accurate to about 1e-10 for functions that are smooth and grow no
    /// faster than the law's tails fall.
    fn mean_of(&self, f: impl Fn(f64) -> f64) -> f64
    where
        Self: Sized;
}
