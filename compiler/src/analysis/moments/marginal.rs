//! The law of a formula at one time, where its distribution function is known.

use std::collections::BTreeMap;

use super::square_root::below;
use super::{LawName, Moments, NormalLaw};
use crate::symbolic::{Expr, Symbol};

/// The law of a formula at one time, where its distribution function is known.
#[derive(Clone, Debug)]
pub enum MarginalLaw {
    /// Normal after a monotone map.
    Normal(NormalLaw),
    /// That of a square-root process after a monotone map.
    SquareRoot(ImageLaw),
    /// That of a Brownian motion with a random drift, or of its distance from the start, after a monotone map.
    RandomDrift(ImageLaw),
}

impl MarginalLaw {
    /// Its name; none where it has one or another by the parameters' values.
    pub fn name(&self) -> Option<LawName> {
        match self {
            Self::Normal(law) => Some(law.name),
            Self::SquareRoot(law) | Self::RandomDrift(law) => law.name,
        }
    }
}

/// A law that is that of a state's coordinate after a strictly monotone map.
#[derive(Clone, Debug)]
pub struct ImageLaw {
    /// Its name; none where the parameters' values decide whether it has an atom.
    pub name: Option<LawName>,
    /// The symbol that stands for the formula's value in `forward`.
    pub(super) variable: Symbol,
    /// The coordinate as a function of that value.
    pub(super) forward: Expr,
    /// Whether that increases.
    pub(super) increasing: bool,
    /// The state, by its index in the model.
    pub(super) state: usize,
}

/// The probability that a process which stays at the end of its domain has got there.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Atom {
    /// The probability.
    pub mass: f64,
    /// Whether it stands at the lower end of the formula's range.
    pub at_lower: bool,
}

impl Atom {
    /// The probability between the atom's end and the quantile of a level.
    pub fn share(self, level: f64) -> f64 {
        if self.at_lower { level } else { 1.0 - level }
    }
}

impl Moments {
    /// The name of the law of a formula at one time, where it is known.
    pub fn law(&self, formula: Expr) -> Option<LawName> {
        self.marginal_law(formula)?.name()
    }

    /// The law of a formula at one time, where it is known.
    pub fn marginal_law(&self, formula: Expr) -> Option<MarginalLaw> {
        let normal = self.normal_law(formula).map(MarginalLaw::Normal);
        normal
            .or_else(|| self.square_root_law(formula).map(MarginalLaw::SquareRoot))
            .or_else(|| self.random_drift_law(formula).map(MarginalLaw::RandomDrift))
    }

    /// `P(formula <= x)` at time `t` for given parameter values.
    pub fn marginal_cdf(
        &self,
        law: &MarginalLaw,
        x: f64,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        match law {
            MarginalLaw::Normal(law) => self.cdf(law, x, values, t),
            MarginalLaw::SquareRoot(law) => self.square_root_cdf(law, x, values, t),
            MarginalLaw::RandomDrift(law) => self.random_drift_cdf(law, x, values, t),
        }
    }

    /// The atom of a law at the end of its range; of mass 0 for a continuous law.
    pub fn atom(&self, law: &MarginalLaw, values: &BTreeMap<Symbol, f64>, t: f64) -> Option<Atom> {
        let (mass, at_lower) = match law {
            MarginalLaw::Normal(_) | MarginalLaw::RandomDrift(_) => (0.0, true),
            MarginalLaw::SquareRoot(law) => {
                let numbers = self.square_root_numbers(law, values, t)?;
                let mass = if numbers.is_stopped() {
                    below(&numbers, 0.0)?
                } else {
                    0.0
                };
                (mass, law.increasing)
            }
        };
        Some(Atom { mass, at_lower })
    }
}
