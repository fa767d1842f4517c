//! The typed model: what the author declared, resolved.
//!
//! Every name in a formula is a symbol of the pool by now: time, a parameter or a state. Named
//! sub-expressions (`where`) and derived quantities used inside other formulas have been substituted;
//! hash-consing keeps that cheap. The front fills this type and nothing else builds one, so that later
//! passes need not check it again.

mod scheme_name;

pub use scheme_name::SchemeName;

use crate::source::{SourceFile, Span};
use crate::symbolic::{Expr, Interval, Pool, Rational, Symbol};

/// A formula as written: its meaning, its text and where it stands.
#[derive(Clone, Debug)]
pub struct Formula {
    /// What it means, in time, parameters and states.
    pub expr: Expr,
    /// The text as the author wrote it.
    pub text: String,
    /// The characters of the formula in the file (inside the quotes).
    pub span: Span,
}

/// How the model's stochastic integrals are to be read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Calculus {
    /// Ito's integral.
    Ito,
    /// Stratonovich's integral; converted to Ito before anything else.
    Stratonovich,
}

/// A model file, resolved.
#[derive(Clone)]
pub struct Model {
    /// The formulas' home.
    pub pool: Pool,
    /// The file.
    pub source: SourceFile,
    /// snake_case name; it names the generated module.
    pub name: String,
    /// One line for people.
    pub title: Option<String>,
    /// Longer text for the dossier.
    pub about: Option<String>,
    /// Unit of time, as text.
    pub time_unit: Option<String>,
    /// Ito or Stratonovich, as declared.
    pub calculus: Calculus,
    /// The symbol `t`.
    pub time: Symbol,
    /// Brownian motions, in file order.
    pub drivers: Vec<Driver>,
    /// Parameters, in file order.
    pub parameters: Vec<Parameter>,
    /// Inequalities between parameters.
    pub assumptions: Vec<Assumption>,
    /// Correlation of the drivers: symmetric, unit diagonal, formulas in parameters (and t).
    pub correlation: Vec<Vec<Expr>>,
    /// Where each declared correlation stands: (driver, driver, formula).
    pub declared_correlations: Vec<(usize, usize, Formula)>,
    /// States, in file order.
    pub states: Vec<State>,
    /// Named sub-expressions, in file order.
    pub wheres: Vec<Named>,
    /// Derived quantities, in file order, with nested ones substituted.
    pub derived: Vec<Named>,
    /// Readouts, in file order; kinks allowed.
    pub readouts: Vec<Named>,
    /// Claims, in file order.
    pub claims: Vec<Claim>,
}

/// A Brownian motion.
#[derive(Clone, Debug)]
pub struct Driver {
    /// Its name.
    pub name: String,
    /// Where it is declared.
    pub span: Span,
}

/// A parameter.
#[derive(Clone, Debug)]
pub struct Parameter {
    /// Its name.
    pub name: String,
    /// Its symbol.
    pub symbol: Symbol,
    /// Default value; without one the caller must give a value.
    pub value: Option<Rational>,
    /// Unit, as text.
    pub unit: Option<String>,
    /// What it is.
    pub about: Option<String>,
    /// Admissible values; the whole line where the author gave no range.
    pub range: Interval,
    /// Where its name stands.
    pub span: Span,
}

/// `left relation right`, assumed by the analysis and checked when a simulator is constructed.
#[derive(Clone, Debug)]
pub struct Assumption {
    /// Its name.
    pub name: String,
    /// Left side.
    pub left: Expr,
    /// The relation.
    pub relation: Relation,
    /// Right side.
    pub right: Expr,
    /// As written.
    pub text: String,
    /// Where it stands.
    pub span: Span,
}

/// A relation between two formulas.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Relation {
    /// `<`
    Less,
    /// `<=`
    LessEqual,
    /// `>`
    Greater,
    /// `>=`
    GreaterEqual,
}

/// What a state does at a closed end of its domain.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum AtEdge {
    /// It stays there for ever.
    Absorb,
    /// It is reflected.
    Reflect,
    /// The equation itself says what happens.
    AsEquation,
}

/// A state.
#[derive(Clone, Debug)]
pub struct State {
    /// Its name.
    pub name: String,
    /// Its symbol.
    pub symbol: Symbol,
    /// What it is.
    pub about: Option<String>,
    /// Unit, as text.
    pub unit: Option<String>,
    /// Value at time 0, in the parameters.
    pub initial: Formula,
    /// Coefficient of dt as declared (Stratonovich models: the Stratonovich drift).
    pub drift: Formula,
    /// Coefficients of the drivers' increments, one per driver, zero where none was declared.
    pub diffusion: Vec<Expr>,
    /// The declared diffusion formulas: (driver, formula).
    pub declared_diffusion: Vec<(usize, Formula)>,
    /// Domain.
    pub domain: Interval,
    /// Whether the author wrote the domain.
    pub domain_span: Option<Span>,
    /// What happens at a closed lower end.
    pub at_lower: Option<AtEdge>,
    /// What happens at a closed upper end.
    pub at_upper: Option<AtEdge>,
    /// Coordinate to simulate in, in this state, t and parameters.
    pub through: Option<Formula>,
    /// Scheme the author asked for, as written, with its place.
    pub scheme: Option<(SchemeName, Span)>,
    /// Where its name stands.
    pub span: Span,
}

/// A named formula.
#[derive(Clone, Debug)]
pub struct Named {
    /// Its name.
    pub name: String,
    /// The formula.
    pub formula: Formula,
    /// What it is.
    pub about: Option<String>,
    /// Unit, as text.
    pub unit: Option<String>,
    /// Where its name stands.
    pub span: Span,
}

/// What the author derived on paper.
#[derive(Clone, Debug)]
pub struct Claim {
    /// Its name.
    pub name: String,
    /// What is claimed.
    pub kind: ClaimKind,
    /// The claim's place: its name and table.
    pub span: Span,
}

/// The kinds of claims.
#[derive(Clone, Debug)]
pub enum ClaimKind {
    /// Ito drift of a formula.
    DriftOf {
        /// The formula.
        of: Formula,
        /// Claimed drift.
        is: Formula,
    },
    /// Diffusion of a formula, per driver (zero where not named).
    DiffusionOf {
        /// The formula.
        of: Formula,
        /// (driver, claimed coefficient).
        is: Vec<(usize, Formula)>,
    },
    /// The formula is a true martingale on every finite horizon.
    Martingale {
        /// The formula.
        of: Formula,
    },
    /// Mean at time t, given the initial values.
    MeanOf {
        /// The formula.
        of: Formula,
        /// Claimed mean, in t and parameters.
        is: Formula,
    },
    /// Variance at time t.
    VarianceOf {
        /// The formula.
        of: Formula,
        /// Claimed variance.
        is: Formula,
    },
    /// Covariance of two formulas at time t.
    CovarianceOf {
        /// The formulas.
        of: [Formula; 2],
        /// Claimed covariance.
        is: Formula,
    },
    /// Law at time t, by its name in the contract (`lognormal`, `normal`, ...).
    LawOf {
        /// The formula.
        of: Formula,
        /// Claimed law.
        is: (String, Span),
    },
}

impl Model {
    /// The state with this symbol.
    pub fn state_of(&self, symbol: Symbol) -> Option<usize> {
        self.states.iter().position(|s| s.symbol == symbol)
    }
}
