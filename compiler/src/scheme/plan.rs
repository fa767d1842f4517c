//! What the planner hands on: coordinates, groups of states stepped together, and the noise of a step.
//!
//! The program is lowered from a [`Plan`] and the reports print it; neither looks at the analysis again.

use std::fmt;

use super::SchemeName;
use crate::analysis::linear_flow::LinearFlow;
use crate::analysis::random_drift::Shape;
use crate::analysis::square_root::AtZero;
use crate::calculus::Process;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Interval, Sign, Symbol};

/// How a whole model is stepped.
#[derive(Clone, Debug)]
pub struct Plan {
    /// One coordinate per state, in model order: what the simulator stores and steps.
    pub coordinates: Vec<Coordinate>,
    /// States stepped together. Every state is in exactly one group; groups stand in the order of
    /// their first state.
    pub groups: Vec<Group>,
    /// The Gaussian vector drawn each step, shared by all groups.
    pub noise: NoisePlan,
}

impl Plan {
    /// The group a state is stepped in, by its index.
    ///
    /// # Panics
    /// When `state` is not a state of the planned model.
    pub fn group_of(&self, state: usize) -> usize {
        self.groups
            .iter()
            .position(|g| g.states.contains(&state))
            .expect("every state of the model is in a group")
    }
}

/// What is stored for a state: `u = forward(x, t)`, and back `x = inverse(u, t)`.
///
/// Where a square-root-like state is stepped by full truncation the stored value may lie beyond the
/// closed end of the domain; then `forward` is the state itself and `inverse` is `max(u, end)` (or
/// `min`, or both), so that whoever reads the state reads the projected value; u has a symbol of its
/// own then, without the state's range.
#[derive(Clone, Debug)]
pub struct Coordinate {
    /// The state, by its index in the model.
    pub state: usize,
    /// The symbol of u: the state's own where both maps are the identity, else an auxiliary one.
    pub symbol: Symbol,
    /// u in the state's symbol, time and parameters.
    pub forward: Expr,
    /// The state in u, time and parameters.
    pub inverse: Expr,
    /// Whether both maps are the identity.
    pub identity: bool,
    /// The values of u on the state's domain; none where they are not known. Where u is the state itself,
    /// the domain, wherever a stored value lies.
    pub image: Option<Interval>,
    /// Drift and diffusion of u by Ito's rule, in the states.
    pub process: Process,
}

/// States that are stepped together.
#[derive(Clone, Debug)]
pub struct Group {
    /// The states, by their indices, ascending.
    pub states: Vec<usize>,
    /// Whether the step draws from the law itself.
    pub kind: Kind,
    /// The law of the states after a step, given the values before, where it is known.
    pub law: Option<Law>,
    /// What the coordinates follow, where that has a name.
    pub becomes: Option<Becomes>,
    /// The scheme.
    pub scheme: SchemeName,
    /// Strong order of convergence; none for an exact scheme and where none is known.
    pub strong_order: Option<Order>,
    /// Weak order of convergence; likewise.
    pub weak_order: Option<Order>,
    /// Whether every step stays in the domain.
    pub preserves_domain: bool,
    /// Why this scheme, sentence by sentence.
    pub reasons: Vec<String>,
    /// What was considered and why it was not taken.
    pub rejected: Vec<(SchemeName, String)>,
    /// The working behind the choice.
    pub trace: Trace,
    /// What is computed in a step.
    pub method: Method,
}

impl Group {
    /// Whether the group is stepped by its exact law.
    pub fn is_exact(&self) -> bool {
        self.kind == Kind::Exact
    }
}

/// Exact or approximate, as the reports say.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Kind {
    /// No discretisation error at the points of the grid.
    Exact,
    /// Converges as the step goes to zero.
    Approximate,
}

impl Kind {
    /// The name in JSON.
    pub fn name(self) -> &'static str {
        match self {
            Self::Exact => "exact",
            Self::Approximate => "approximate",
        }
    }
}

/// The law of a group's states after a step.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Law {
    /// One normal state.
    Normal,
    /// One positive state whose logarithm is normal.
    Lognormal,
    /// Several states, jointly normal.
    JointNormal,
    /// Monotone images of (jointly) normal coordinates.
    TransformedNormal,
    /// One state, up to an affine map a multiple of a noncentral chi-square variable.
    NoncentralChiSquare,
    /// A monotone image of such a variable.
    TransformedNoncentralChiSquare,
    /// The law of a square-root process that stays at 0 once there, or a monotone image of it: an atom, and
    /// a density beside it.
    AbsorbedNoncentralChiSquare,
    /// One state, up to an affine map one of two normal variables of the same variance.
    GaussianMixture,
    /// A monotone image of such a variable.
    TransformedGaussianMixture,
    /// One state, up to an affine map the distance of a three-dimensional Brownian motion with drift from where it
    /// started.
    BesselWithDrift,
    /// A monotone image of such a distance.
    TransformedBesselWithDrift,
    /// No randomness.
    Deterministic,
}

impl Law {
    /// The name in JSON and in claims.
    pub fn name(self) -> &'static str {
        match self {
            Self::Normal => "normal",
            Self::Lognormal => "lognormal",
            Self::JointNormal => "joint_normal",
            Self::TransformedNormal => "transformed_normal",
            Self::NoncentralChiSquare => "noncentral_chi_square",
            Self::TransformedNoncentralChiSquare => "transformed_noncentral_chi_square",
            Self::AbsorbedNoncentralChiSquare => "absorbed_noncentral_chi_square",
            Self::GaussianMixture => "gaussian_mixture",
            Self::TransformedGaussianMixture => "transformed_gaussian_mixture",
            Self::BesselWithDrift => "bessel_with_drift",
            Self::TransformedBesselWithDrift => "transformed_bessel_with_drift",
            Self::Deterministic => "deterministic",
        }
    }
}

/// What a group's coordinates follow.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Becomes {
    /// du = alpha dt + c dW.
    ArithmeticBrownianMotion,
    /// du = (alpha + a u) dt + c dW with one coordinate.
    OrnsteinUhlenbeck,
    /// du = (A u + alpha) dt + C dW.
    LinearGaussianSystem,
    /// dy = (level - rate y) dt + s sqrt(y) dW with one coordinate.
    SquareRoot,
    /// du = m tanh(m u/s^2 + c) dt + s dW with one coordinate: a drift of m or -m, nobody knows which.
    RandomDrift,
    /// du = m coth(m u/s^2) dt + s dW with one coordinate: the distance of a drifted Brownian motion in three dimensions.
    BesselWithDrift,
    /// dX = A X dt + sum B_j X dW_j with matrices that commute.
    LinearFlow,
    /// A linear differential equation without noise.
    Deterministic,
}

impl Becomes {
    /// The name in JSON.
    pub fn name(self) -> &'static str {
        match self {
            Self::ArithmeticBrownianMotion => "arithmetic_brownian_motion",
            Self::OrnsteinUhlenbeck => "ornstein_uhlenbeck",
            Self::LinearGaussianSystem => "linear_gaussian_system",
            Self::SquareRoot => "square_root",
            Self::RandomDrift => "brownian_motion_with_random_drift",
            Self::BesselWithDrift => "bessel_with_drift",
            Self::LinearFlow => "commuting_linear_flow",
            Self::Deterministic => "deterministic",
        }
    }
}

/// An order of convergence, as a fraction in lowest terms.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Order {
    /// Numerator.
    pub numerator: u32,
    /// Denominator.
    pub denominator: u32,
}

impl Order {
    /// Order one half.
    pub const HALF: Self = Self {
        numerator: 1,
        denominator: 2,
    };
    /// Order one.
    pub const ONE: Self = Self {
        numerator: 1,
        denominator: 1,
    };
    /// Order three halves.
    pub const THREE_HALVES: Self = Self {
        numerator: 3,
        denominator: 2,
    };
    /// Order two.
    pub const TWO: Self = Self {
        numerator: 2,
        denominator: 1,
    };
    /// Order four.
    pub const FOUR: Self = Self {
        numerator: 4,
        denominator: 1,
    };

    /// As a number.
    pub fn value(self) -> f64 {
        f64::from(self.numerator) / f64::from(self.denominator)
    }
}

impl fmt::Display for Order {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.denominator {
            1 => write!(f, "{}", self.numerator),
            d => write!(f, "{}/{d}", self.numerator),
        }
    }
}

/// What a step of a group computes.
#[derive(Clone, Debug)]
pub enum Method {
    /// The exact transition of a linear Gaussian system.
    LinearGaussian(LinearGaussian),
    /// The transition of a square-root process.
    SquareRoot(SquareRootStep),
    /// The exact transition of a Brownian motion with a random drift, or of its distance from the start.
    RandomDrift(RandomDriftStep),
    /// The normal law given a square-root process at both ends of the step.
    Carried(CarriedStep),
    /// The exact map of two states by the drivers' increments.
    LinearFlow(LinearFlow),
    /// A one-step scheme that reads increments of the drivers: Euler-Maruyama, Milstein, full truncation.
    Step(Vec<StateStep>),
    /// Classical Runge-Kutta over the step, all states of the group together: the drift of each
    /// coordinate, in the coordinates' symbols, time and parameters.
    RungeKutta4(Vec<(usize, Expr)>),
}

/// `du = (a u + alpha) dt + c dW` with `a`, `alpha`, `c` free of states.
///
/// Rows and columns of `a`, entries of `alpha` and rows of `c` follow [`Group::states`]; the columns of
/// `c` are the model's drivers, in its order.
#[derive(Clone, Debug)]
pub struct LinearGaussian {
    /// The drift matrix.
    pub a: Vec<Vec<Expr>>,
    /// The constant part of the drift.
    pub alpha: Vec<Expr>,
    /// The coefficients of the drivers' increments.
    pub c: Vec<Vec<Expr>>,
    /// Where the Gaussian part of each row comes from.
    pub noise: Vec<RowNoise>,
    /// Whether a coefficient, or a correlation of the rows' noises, depends on time.
    pub moving: bool,
}

/// `dy = (level - rate y) dt + s sqrt(y) dW`, all coefficients free of states.
#[derive(Clone, Debug)]
pub struct SquareRootStep {
    /// The state, by its index in the model.
    pub state: usize,
    /// `level` there.
    pub level: Expr,
    /// `rate` there.
    pub rate: Expr,
    /// `s^2` there.
    pub square: Expr,
    /// `4 level/s^2`, free of time.
    pub dimension: Expr,
    /// Whether `level`, `rate` or `s` depends on time.
    pub moving: bool,
    /// What happens at zero.
    pub at_zero: AtZero,
    /// What is known of the signs of `dimension`, `dimension - 1` and `dimension - 2`.
    pub against: [Sign; 3],
    /// Whether the transition is drawn exactly or by its first two moments.
    pub draw: Drawn,
}

/// How the transition of a square-root process is drawn.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Drawn {
    /// As the noncentral chi-square variable that it is.
    Exactly,
    /// By the quadratic-exponential scheme (Andersen 2008, section 3.2), from the increment of
    /// `B = sum_j b_j W_j`; here the coefficients `b`, one per driver.
    ByMoments(Vec<Expr>),
}

/// States that are normal given a square-root process y with `dy = (level - rate y) dt + s sqrt(y) dB`, its noncentral
/// chi-square transition and its integral.
#[derive(Clone, Debug)]
pub struct CarriedStep {
    /// The state of the process, by its index in the model; stepped by [`Method::SquareRoot`].
    pub carrier: usize,
    /// The states.
    pub states: Vec<CarriedState>,
}

/// `du = (free + along y) dt + sqrt(y) (shared dB + sum_j rest_j dW_j)`.
///
/// All but `free`, which is in the coordinates' symbols, time and parameters and taken at the start of the step, are
/// free of states and time. The two noises are independent.
#[derive(Clone, Debug)]
pub struct CarriedState {
    /// The state, by its index in the model.
    pub state: usize,
    /// `free` there.
    pub free: Expr,
    /// `along` there.
    pub along: Expr,
    /// `shared` there.
    pub shared: Expr,
    /// `rest` there, one per driver.
    pub rest: Vec<Expr>,
    /// The variance rate of the last noise, as a multiple of y.
    pub rest_square: Expr,
    /// Whether the mean of `exp(u)` is kept at `exp(u + free h)`.
    pub keeps_growth: bool,
}

/// `du = f dt + s dW` with `s^2 f' + f^2 = m^2`, `s` and `m` free of states and time.
#[derive(Clone, Debug)]
pub struct RandomDriftStep {
    /// The state, by its index in the model.
    pub state: usize,
    /// `f` there, in the coordinate.
    pub drift: Expr,
    /// `m` there, not negative.
    pub speed: Expr,
    /// `s^2` there.
    pub square: Expr,
    /// Whether the coordinate lives on the line or on the half line from 0.
    pub shape: Shape,
}

/// Where the Gaussian part of a row of a linear Gaussian system comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum RowNoise {
    /// No driver reaches the row.
    None,
    /// The row of `a` is zero, nothing of the system depends on time: the Gaussian part is `sum_j c_j (W_j(t+h) - W_j(t))`, out of the raw
    /// increments.
    Increments,
    /// A component of its own, a [`Component::Convolution`].
    Convolution,
}

/// One state of a one-step scheme.
///
/// All formulas are in the coordinates' symbols (those of other groups too), time and parameters, and
/// are taken at the start of the step.
#[derive(Clone, Debug)]
pub struct StateStep {
    /// The state, by its index in the model.
    pub state: usize,
    /// Drift of the coordinate.
    pub drift: Expr,
    /// Coefficients of the drivers' increments, one per driver.
    pub diffusion: Vec<Expr>,
    /// Milstein's terms: `(j, k, coefficient)` with `j <= k` adds
    /// `coefficient * (dW_j dW_k - rho_jk h)`. Empty for the Euler schemes.
    pub milstein: Vec<(usize, usize, Expr)>,
    /// The terms with Levy areas, where the noise does not commute: `(j, k, coefficient)` with `j < k` adds
    /// `coefficient * A_jk`, where `A_jk` is half of `int W_j dW_k - W_k dW_j` over the step.
    pub areas: Vec<(usize, usize, Expr)>,
    /// How the equation of the step is solved, for the drift-implicit scheme: the drift is taken at its end.
    pub implicit: Option<Implicit>,
    /// What tames the drift, for the tamed schemes: the drift `a` enters as `a h/(1 + h size)`.
    pub taming: Option<Expr>,
    /// The terms of order 1.5, for the strong Taylor scheme.
    pub taylor: Option<Taylor>,
    /// What is done at a closed lower end.
    pub lower: Option<EdgeRule>,
    /// What is done at a closed upper end.
    pub upper: Option<EdgeRule>,
}

/// How `z - h a(z) = r` is solved for the coordinate z after a step. The formulas are in the coordinates' symbols, time and
/// parameters; z and time are taken at the end of the step, other coordinates at its start.
#[derive(Clone, Debug)]
pub enum Implicit {
    /// `a(z) = pole/z + constant + slope z` with z positive: a quadratic equation.
    Quadratic {
        /// `pole` there, positive.
        pole: Expr,
        /// `constant` there.
        constant: Expr,
        /// `slope` there.
        slope: Expr,
    },
    /// By Newton's method.
    Newton {
        /// The derivative of `a`.
        slope: Expr,
    },
}

/// The terms that the strong Taylor scheme of order 1.5 adds to Milstein's (Kloeden and Platen 1992,
/// section 10.4), with `dZ_j = int_t^{t+h} (W_j(s) - W_j(t)) ds`.
#[derive(Clone, Debug)]
pub struct Taylor {
    /// `L^0 a`, times `h^2/2`.
    pub drift: Expr,
    /// `(j, L^j a, L^0 b^j)`: the first times `dZ_j`, the second times `h dW_j - dZ_j`.
    pub mixed: Vec<(usize, Expr, Expr)>,
    /// `(j, L^j L^j b^j)`, times `(dW_j^2/3 - h) dW_j/2`: with one driver alone.
    pub cubic: Option<(usize, Expr)>,
}

/// What a step does with a value at or beyond a closed end `e` of the domain; `u` is the stored value
/// before the step, `v` the one the scheme computes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum EdgeRule {
    /// At a lower end: `e` if `u <= e` or `v <= e`, else `v`; mirrored at an upper end.
    Absorb {
        /// The end, in the parameters.
        end: Expr,
    },
    /// At a lower end: `e + |v - e|`; at an upper end: `e - |e - v|`, before any absorption. Where both
    /// ends reflect, what then lies below the lower one is put there.
    Reflect {
        /// The end, in the parameters.
        end: Expr,
    },
}

/// The Gaussian vector of a step.
#[derive(Clone, Debug, Default)]
pub struct NoisePlan {
    /// The components: raw increments first, in the drivers' order, then convolutions in the order of
    /// the groups and their states. Their covariance over a step of length h follows from the
    /// correlation R and the groups' `a`, `c`: a raw driver counts as a row with `a = 0`.
    pub components: Vec<NoiseComponent>,
}

impl NoisePlan {
    /// The place of a component, if some scheme needs it.
    pub fn position(&self, component: Component) -> Option<usize> {
        self.components
            .iter()
            .position(|c| c.component == component)
    }
}

/// A component with the name its random numbers are addressed by.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NoiseComponent {
    /// What it is.
    pub component: Component,
    /// The source's name: the driver's, or `law:<state>` for the Gaussian part of an exact row that is
    /// not the only one to use its driver.
    pub source: String,
}

/// A component of the Gaussian vector of a step.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Component {
    /// The increment of a driver over the step.
    Increment {
        /// The driver, by its index.
        driver: usize,
    },
    /// An independent increment that makes up, with the driver's own, the integral of the driver over
    /// the step: `dZ = h (dW + dV/sqrt(3))/2`. The companions are correlated as the drivers are.
    Companion {
        /// The driver, by its index.
        driver: usize,
    },
    /// The Gaussian part of the coordinate of a state of an exact group: its row of
    /// `int_0^h exp(a (h - s)) c dW(s)`.
    Convolution {
        /// The group, by its index in [`Plan::groups`].
        group: usize,
        /// The state, by its index in the model.
        state: usize,
    },
}
