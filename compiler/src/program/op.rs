//! The operations of the step program.

use std::fmt;

use super::functions::{BinaryOp, UnaryOp};

/// A value of a [`Program`](super::Program); values are in single-assignment form.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct ValueId(pub(super) u32);

impl ValueId {
    /// The place of the value in [`Program::values`](super::Program::values).
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

impl fmt::Display for ValueId {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "%{}", self.0)
    }
}

/// A number of the program, equal to another when all its bits are.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Number(u64);

impl Number {
    /// From its value.
    pub fn new(value: f64) -> Self {
        Self(value.to_bits())
    }

    /// Its value.
    pub fn value(self) -> f64 {
        f64::from_bits(self.0)
    }
}

/// How a [`Op::Select`] compares; a comparison with NaN is false.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Comparison {
    /// `a < b`
    Less,
    /// `a <= b`
    LessEqual,
}

/// The law of a [`Op::Draw`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum DrawLaw {
    /// Gamma of scale 1; the parameter is the shape.
    Gamma,
    /// Poisson; the parameter is the mean.
    Poisson,
}

impl DrawLaw {
    /// The name, in the runtime too.
    pub fn name(self) -> &'static str {
        match self {
            Self::Gamma => "gamma",
            Self::Poisson => "poisson",
        }
    }
}

/// What a law is asked with.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Argument {
    /// The value of the state before the step.
    Before,
    /// The value at which a function of the law is taken.
    At,
}

impl Argument {
    /// The name, in Rust too.
    pub fn name(self) -> &'static str {
        match self {
            Self::Before => "before",
            Self::At => "at",
        }
    }
}

/// What computes a value.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Op {
    /// A number.
    Const(Number),
    /// A parameter, by its index.
    Parameter(usize),
    /// Time at the start of the step.
    Start,
    /// Length of the step.
    Length,
    /// Time of the observation.
    Time,
    /// Time of an instant within a step.
    Instant,
    /// What a law is asked with.
    Argument(Argument),
    /// A state slot: at the start of the step, or at the observation.
    State(usize),
    /// A standard normal draw of the step, by the index of its source.
    Noise(usize),
    /// A draw from another law on each path, in a step only.
    Draw {
        /// The law.
        law: DrawLaw,
        /// The index of its source among [`Program::draws`](super::Program::draws).
        source: usize,
        /// The law's parameter.
        parameter: ValueId,
    },
    /// A function of one value.
    Unary(UnaryOp, ValueId),
    /// A function of two values.
    Binary(BinaryOp, ValueId, ValueId),
    /// `a * b + c`, rounded once or twice as the arithmetic class says.
    MulAdd(ValueId, ValueId, ValueId),
    /// `then` where the comparison of `a` with `b` holds, else `otherwise`.
    Select {
        /// The comparison.
        compare: Comparison,
        /// Its left side.
        a: ValueId,
        /// Its right side.
        b: ValueId,
        /// The result where it holds.
        then: ValueId,
        /// The result where it does not.
        otherwise: ValueId,
    },
    /// The lower triangular factor of a covariance matrix, row by row: `dim * dim` numbers.
    Cholesky {
        /// Rows of the matrix.
        dim: usize,
        /// The matrix, row by row.
        covariance: Box<[ValueId]>,
    },
    /// The exact transition of `du = (a u + alpha) dt + noise` of covariance rate `q`: `exp(a h)`
    /// (`dim * dim` numbers), the shift (`dim`), the covariance (`dim * dim`).
    Transition {
        /// Coordinates.
        dim: usize,
        /// Drift matrix, row by row.
        a: Box<[ValueId]>,
        /// Constant drift.
        alpha: Box<[ValueId]>,
        /// Covariance rate, row by row.
        q: Box<[ValueId]>,
        /// Length of the step.
        length: ValueId,
    },
    /// As [`Op::Transition`], with coefficients that depend on time: `a`, `alpha` and `q` may be of rate
    /// [`Rate::Instant`](super::Rate::Instant).
    MovingTransition {
        /// Coordinates.
        dim: usize,
        /// Drift matrix, row by row.
        a: Box<[ValueId]>,
        /// Constant drift.
        alpha: Box<[ValueId]>,
        /// Covariance rate, row by row.
        q: Box<[ValueId]>,
        /// Start of the step.
        start: ValueId,
        /// Length of the step.
        length: ValueId,
    },
    /// Normal draws mixed by the lower triangular factor of their covariance, on each path: row `i` is
    /// the sum over `k <= i` of the factor's entry times the draw of the `k`-th source, multiply-adds from
    /// zero and from the first column on.
    Correlate {
        /// An [`Op::Cholesky`] with as many rows as there are sources.
        factor: ValueId,
        /// The indices of the sources.
        sources: Box<[usize]>,
    },
    /// Levy areas of independent drivers over the step, divided by its length, given their standardised increments,
    /// one area a pair on each path.
    Areas {
        /// Length of the step.
        length: ValueId,
        /// By driver: the index of the normal source of its increment, and that of its Fourier terms among
        /// [`Program::draws`](super::Program::draws).
        drivers: Box<[(usize, usize)]>,
        /// By area: places of two drivers, and the index of the draw of its remainder.
        pairs: Box<[(usize, usize, usize)]>,
    },
    /// One number out of a matrix operation, one row of correlated draws, or one area.
    Extract(ValueId, usize),
}

impl Op {
    /// The operands, in order.
    pub fn operands(&self) -> Vec<ValueId> {
        match self {
            Self::Const(_)
            | Self::Parameter(_)
            | Self::Start
            | Self::Length
            | Self::Time
            | Self::Instant
            | Self::Argument(_)
            | Self::State(_)
            | Self::Noise(_) => Vec::new(),
            Self::Unary(_, a)
            | Self::Extract(a, _)
            | Self::Draw { parameter: a, .. }
            | Self::Areas { length: a, .. }
            | Self::Correlate { factor: a, .. } => vec![*a],
            Self::Binary(_, a, b) => vec![*a, *b],
            Self::MulAdd(a, b, c) => vec![*a, *b, *c],
            Self::Select {
                a,
                b,
                then,
                otherwise,
                ..
            } => vec![*a, *b, *then, *otherwise],
            Self::Cholesky { covariance, .. } => covariance.to_vec(),
            Self::Transition {
                a,
                alpha,
                q,
                length,
                ..
            } => {
                let matrices = a.iter().chain(alpha).chain(q).copied();
                matrices.chain([*length]).collect()
            }
            Self::MovingTransition {
                a,
                alpha,
                q,
                start,
                length,
                ..
            } => {
                let matrices = a.iter().chain(alpha).chain(q).copied();
                matrices.chain([*start, *length]).collect()
            }
        }
    }

    /// The numbers the operation yields: 1, or more where only [`Op::Extract`] may read it.
    pub fn width(&self) -> usize {
        match self {
            Self::Cholesky { dim, .. } => dim * dim,
            Self::Transition { dim, .. } | Self::MovingTransition { dim, .. } => {
                2 * dim * dim + dim
            }
            Self::Correlate { sources, .. } => sources.len(),
            Self::Areas { pairs, .. } => pairs.len(),
            _ => 1,
        }
    }

    /// The lanes that an operation before the loops over lanes fills: its results, then what it works with.
    pub fn lanes(&self) -> usize {
        match self {
            Self::Correlate { .. } => self.width(),
            Self::Areas { drivers, .. } => self.width() + 2 * drivers.len(),
            _ => 0,
        }
    }

    /// Whether the result is a whole matrix or vector: only [`Op::Extract`] may read it, and
    /// [`Op::Correlate`] a factor.
    pub fn is_aggregate(&self) -> bool {
        matches!(
            self,
            Self::Cholesky { .. }
                | Self::Transition { .. }
                | Self::MovingTransition { .. }
                | Self::Correlate { .. }
                | Self::Areas { .. }
        )
    }

    /// Whether an operand is a coefficient that the operation integrates over a step.
    pub(super) fn integrates(&self, operand: ValueId) -> bool {
        match self {
            Self::MovingTransition { a, alpha, q, .. } => {
                a.iter().chain(alpha).chain(q).any(|&id| id == operand)
            }
            _ => false,
        }
    }
}
