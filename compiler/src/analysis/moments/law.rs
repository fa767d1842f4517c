//! The law of a formula at one time, where it is a known function of Gaussian coordinates.

use std::collections::BTreeMap;

use super::Moments;
use super::tilting::{Tilted, in_coordinates};
use crate::symbolic::{Expr, Symbol, SymbolKind};

/// The law of a formula at time t, given the initial values.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LawName {
    /// Not random.
    Deterministic,
    /// Normal.
    Normal,
    /// The logarithm is normal.
    Lognormal,
    /// A strictly monotone function of a normal variable, neither of the above.
    TransformedNormal,
    /// An affine function of a noncentral chi-square variable.
    NoncentralChiSquare,
    /// Another strictly monotone function of such a variable.
    TransformedNoncentralChiSquare,
    /// A monotone function of a square-root process that stays at 0 once there: an atom, and a density
    /// beside it.
    AbsorbedNoncentralChiSquare,
    /// An affine function of a variable that is one of two normal ones of the same variance.
    GaussianMixture,
    /// Another strictly monotone function of such a variable.
    TransformedGaussianMixture,
    /// An affine function of the distance of a three-dimensional Brownian motion with drift from where it started.
    BesselWithDrift,
    /// Another strictly monotone function of such a distance.
    TransformedBesselWithDrift,
}

impl LawName {
    /// The name in claims and in JSON.
    pub fn name(self) -> &'static str {
        match self {
            Self::Deterministic => "deterministic",
            Self::Normal => "normal",
            Self::Lognormal => "lognormal",
            Self::TransformedNormal => "transformed_normal",
            Self::NoncentralChiSquare => "noncentral_chi_square",
            Self::TransformedNoncentralChiSquare => "transformed_noncentral_chi_square",
            Self::AbsorbedNoncentralChiSquare => "absorbed_noncentral_chi_square",
            Self::GaussianMixture => "gaussian_mixture",
            Self::TransformedGaussianMixture => "transformed_gaussian_mixture",
            Self::BesselWithDrift => "bessel_with_drift",
            Self::TransformedBesselWithDrift => "transformed_bessel_with_drift",
        }
    }
}

/// A law that is normal after a strictly monotone map: `forward(x) ~ N(mean, variance)`.
#[derive(Clone, Debug)]
pub struct NormalLaw {
    /// Its name.
    pub name: LawName,
    /// The symbol that stands for the formula's value in `forward`.
    pub variable: Symbol,
    /// The map that makes it normal.
    pub forward: Expr,
    /// Whether the map increases.
    pub increasing: bool,
    /// Mean of the image, in t and parameters; none without a closed form.
    pub mean: Option<Expr>,
    /// Variance of the image, in t and parameters; none without a closed form.
    pub variance: Option<Expr>,
    /// What the image is as a function of the states.
    image: Expr,
}

impl Moments {
    /// The law of a formula that is a monotone function of Gaussian coordinates.
    pub fn normal_law(&self, formula: Expr) -> Option<NormalLaw> {
        self.affine_law(formula)
            .or_else(|| self.exponential_law(formula))
            .or_else(|| self.state_law(formula))
    }

    /// `P(formula <= x)` at time `t` for given parameter values.
    pub fn cdf(
        &self,
        law: &NormalLaw,
        x: f64,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        let pool = &self.model.pool;
        let mut at = values.clone();
        at.insert(self.model.time, t);
        at.insert(law.variable, x);
        let place = pool.eval_f64(law.forward, &at)?;
        let mean = self.numeric_mean(law.image, values, t)?;
        let deviation = self.numeric_variance(law.image, values, t)?.sqrt();
        let z = (place - mean) / deviation;
        let z = if law.increasing { z } else { -z };
        z.is_finite()
            .then(|| driftwright_runtime::math::normal_cdf::<driftwright_runtime::Unfused>(z))
    }

    /// The symbol for the value of a formula; no name in a model file can contain a bracket.
    pub(super) fn value_symbol(&self) -> Symbol {
        self.model.pool.symbol("value[x]", SymbolKind::Auxiliary)
    }

    fn affine_law(&self, formula: Expr) -> Option<NormalLaw> {
        let pool = &self.model.pool;
        let read = Tilted::read(&self.model, &self.gaussian, formula)?;
        let (_, slopes) = read.affine(pool)?;
        let random = slopes
            .keys()
            .any(|&row| !self.gaussian.is_deterministic(pool, row));
        let name = if random {
            LawName::Normal
        } else {
            LawName::Deterministic
        };
        let variable = self.value_symbol();
        Some(self.with_moments(name, variable, pool.var(variable), formula, true))
    }

    fn exponential_law(&self, formula: Expr) -> Option<NormalLaw> {
        let pool = &self.model.pool;
        let read = Tilted::read(&self.model, &self.gaussian, formula)?;
        let (factor, slopes) = read.exponential(pool)?;
        if !pool.sign(pool.simplify(factor)).is_positive() {
            return None;
        }
        let random = slopes
            .keys()
            .any(|&row| !self.gaussian.is_deterministic(pool, row));
        let name = if random {
            LawName::Lognormal
        } else {
            LawName::Deterministic
        };
        let variable = self.value_symbol();
        let row = |&i: &usize| pool.var(self.gaussian.rows[i].symbol);
        let linear: Vec<Expr> = slopes.iter().map(|(i, &s)| pool.mul(s, row(i))).collect();
        let image = pool.add(pool.log(factor), self.in_states(pool.sum(linear)));
        Some(self.with_moments(name, variable, pool.log(pool.var(variable)), image, true))
    }

    /// A state by itself, through its coordinate.
    fn state_law(&self, formula: Expr) -> Option<NormalLaw> {
        let pool = &self.model.pool;
        let row = self
            .gaussian
            .rows
            .iter()
            .position(|row| formula == pool.var(self.model.states[row.state].symbol))?;
        let found = &self.gaussian.rows[row];
        let symbol = self.model.states[found.state].symbol;
        let slope = pool.sign(pool.simplify(pool.derivative(found.forward, symbol)));
        let increasing = slope.is_non_negative();
        if !slope.is_non_negative() && !slope.is_non_positive() {
            return None;
        }
        let random = !self.gaussian.is_deterministic(pool, row);
        let name = if random {
            LawName::TransformedNormal
        } else {
            LawName::Deterministic
        };
        Some(self.with_moments(name, symbol, found.forward, found.forward, increasing))
    }

    fn with_moments(
        &self,
        name: LawName,
        variable: Symbol,
        forward: Expr,
        image: Expr,
        increasing: bool,
    ) -> NormalLaw {
        let mean = self.mean(image).map(|m| m.value);
        let variance = self.variance(image).map(|m| m.value);
        NormalLaw {
            name,
            variable,
            forward,
            increasing,
            mean,
            variance,
            image,
        }
    }

    /// A formula in the coordinates, in the states.
    fn in_states(&self, formula: Expr) -> Expr {
        let rows = self.gaussian.rows.iter();
        let map: BTreeMap<Symbol, Expr> = rows.map(|row| (row.symbol, row.forward)).collect();
        self.model.pool.substitute(formula, &map)
    }

    /// Whether every state in the formula has a Gaussian coordinate.
    pub(super) fn is_gaussian(&self, formula: Expr) -> bool {
        in_coordinates(&self.model, &self.gaussian, formula).is_some()
    }
}
