//! The published names of the schemes.

use std::fmt;

/// A scheme, under its published name (section 4 of the language page).
///
/// A name that exists is not yet a promise that the scheme fits a model: the planner refuses an
/// override it cannot honour and says why.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum SchemeName {
    /// The transition law itself: no discretisation error.
    Exact,
    /// Euler-Maruyama (Maruyama 1955).
    EulerMaruyama,
    /// Milstein (Milstein 1974), for scalar, diagonal or commutative noise.
    Milstein,
    /// Milstein without Levy areas, for antithetic multilevel estimators (Giles and Szpruch 2014).
    AntitheticMilstein,
    /// Strong Taylor scheme of order 1.5 (Platen and Wagner 1982).
    StrongTaylor15,
    /// Drift-implicit (backward) Euler.
    DriftImplicitEuler,
    /// Tamed Euler (Hutzenthaler, Jentzen and Kloeden 2012).
    TamedEuler,
    /// Tamed Milstein (Wang and Gan 2013).
    TamedMilstein,
    /// Euler with coefficients at the value projected to the domain (Lord, Koekkoek and van Dijk 2010).
    FullTruncationEuler,
    /// Quadratic-exponential scheme for square-root variance (Andersen 2008).
    QuadraticExponential,
    /// Normal given the square-root process at both ends of the step (Broadie and Kaya 2006; Andersen 2008).
    ConditionalGaussian,
    /// Classical fourth-order Runge-Kutta (Kutta 1901), for states without noise.
    RungeKutta4,
}

impl SchemeName {
    /// Every scheme, in the order of the language page.
    pub const ALL: [Self; 12] = [
        Self::Exact,
        Self::EulerMaruyama,
        Self::Milstein,
        Self::AntitheticMilstein,
        Self::StrongTaylor15,
        Self::DriftImplicitEuler,
        Self::TamedEuler,
        Self::TamedMilstein,
        Self::FullTruncationEuler,
        Self::QuadraticExponential,
        Self::ConditionalGaussian,
        Self::RungeKutta4,
    ];

    /// The name as model files and reports spell it.
    ///
    /// ```
    /// use driftwright::model::SchemeName;
    /// assert_eq!(SchemeName::StrongTaylor15.name(), "strong_taylor_1_5");
    /// ```
    pub fn name(self) -> &'static str {
        match self {
            Self::Exact => "exact",
            Self::EulerMaruyama => "euler_maruyama",
            Self::Milstein => "milstein",
            Self::AntitheticMilstein => "antithetic_milstein",
            Self::StrongTaylor15 => "strong_taylor_1_5",
            Self::DriftImplicitEuler => "drift_implicit_euler",
            Self::TamedEuler => "tamed_euler",
            Self::TamedMilstein => "tamed_milstein",
            Self::FullTruncationEuler => "full_truncation_euler",
            Self::QuadraticExponential => "quadratic_exponential",
            Self::ConditionalGaussian => "conditional_gaussian",
            Self::RungeKutta4 => "runge_kutta_4",
        }
    }

    /// The scheme with this name, if there is one.
    ///
    /// ```
    /// use driftwright::model::SchemeName;
    /// assert_eq!(SchemeName::from_name("milstein"), Some(SchemeName::Milstein));
    /// assert_eq!(SchemeName::from_name("milstien"), None);
    /// ```
    pub fn from_name(name: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|s| s.name() == name)
    }
}

impl fmt::Display for SchemeName {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}
