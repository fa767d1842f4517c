//! Laws of states after a step, given their values before.

use super::checks::Range;
use super::op::ValueId;

/// The law of a state after a step, in a coordinate of it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StateLaw {
    /// The state.
    pub slot: usize,
    /// The law of the coordinate.
    pub shape: LawShape,
    /// How the coordinate is a function of the state; none where it is the state.
    pub image: Option<LawImage>,
}

/// The law of a coordinate, by its numbers.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LawShape {
    /// Mean and standard deviation.
    Normal([ValueId; 2]),
    /// The probability of the first of two centres, both, and the standard deviation about either.
    Mixture([ValueId; 4]),
    /// Scale, degrees of freedom and noncentrality; reflected at 0.
    Reflected([ValueId; 3]),
    /// The same, stopped at 0.
    Absorbed([ValueId; 3]),
}

/// A coordinate as a function of the state.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LawImage {
    /// The natural logarithm of a positive state; its law is normal.
    Logarithm,
    /// Any other.
    Map {
        /// The coordinate of [`Argument::At`](super::Argument::At).
        forward: ValueId,
        /// Its derivative there.
        slope: ValueId,
        /// The state whose coordinate is [`Argument::At`](super::Argument::At).
        inverse: ValueId,
        /// The domain of the state.
        domain: Range,
    },
}

impl LawShape {
    /// Its name.
    pub fn name(&self) -> &'static str {
        match self {
            Self::Normal(_) => "normal",
            Self::Mixture(_) => "mixture",
            Self::Reflected(_) => "chi_square reflected",
            Self::Absorbed(_) => "chi_square absorbed",
        }
    }

    /// Its numbers.
    pub fn numbers(&self) -> &[ValueId] {
        match self {
            Self::Normal(numbers) => numbers,
            Self::Mixture(numbers) => numbers,
            Self::Reflected(numbers) | Self::Absorbed(numbers) => numbers,
        }
    }

    fn map(self, f: impl Fn(ValueId) -> ValueId) -> Self {
        match self {
            Self::Normal(numbers) => Self::Normal(numbers.map(f)),
            Self::Mixture(numbers) => Self::Mixture(numbers.map(f)),
            Self::Reflected(numbers) => Self::Reflected(numbers.map(f)),
            Self::Absorbed(numbers) => Self::Absorbed(numbers.map(f)),
        }
    }
}

impl LawImage {
    fn operands(&self) -> Vec<ValueId> {
        let Self::Map {
            forward,
            slope,
            inverse,
            domain,
        } = self
        else {
            return Vec::new();
        };
        let ends = [domain.lower, domain.upper].into_iter();
        let ends = ends.filter_map(super::Bound::value);
        ends.chain([*forward, *slope, *inverse]).collect()
    }

    fn map(self, f: impl Fn(ValueId) -> ValueId) -> Self {
        match self {
            Self::Logarithm => Self::Logarithm,
            Self::Map {
                forward,
                slope,
                inverse,
                domain,
            } => Self::Map {
                forward: f(forward),
                slope: f(slope),
                inverse: f(inverse),
                domain: domain.map(f),
            },
        }
    }
}

impl StateLaw {
    /// The values it reads.
    pub fn operands(&self) -> impl Iterator<Item = ValueId> + '_ {
        let image = self.image.iter().flat_map(LawImage::operands);
        self.shape.numbers().iter().copied().chain(image)
    }

    /// The law with every value replaced.
    pub(super) fn map(self, f: impl Fn(ValueId) -> ValueId) -> Self {
        Self {
            slot: self.slot,
            shape: self.shape.map(&f),
            image: self.image.map(|image| image.map(&f)),
        }
    }
}
