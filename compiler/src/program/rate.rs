//! How often a value of the step program changes.

use std::fmt;

/// How often a value changes. A value is computed as seldom as its operands allow, which is what
/// moves work out of the loops over paths and steps.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Rate {
    /// Known when the model is compiled.
    Constant,
    /// Once per parameter set.
    Setup,
    /// Once per step of the time grid, the same on every path.
    Step,
    /// Once per observation time, the same on every path.
    Observation,
    /// At every instant at which the coefficients of a step are asked for while its law is integrated,
    /// the same on every path. Only a law reads such a value.
    Instant,
    /// Once per law of a state after a step, or per value at which it is asked.
    Law,
    /// In every step on every path.
    StepLane,
    /// At every observation on every path.
    ObservationLane,
}

impl Rate {
    /// Every rate, from the slowest to the fastest.
    pub const ALL: [Self; 8] = [
        Self::Constant,
        Self::Setup,
        Self::Step,
        Self::Observation,
        Self::Instant,
        Self::Law,
        Self::StepLane,
        Self::ObservationLane,
    ];

    /// Whether there is one value per path.
    pub fn is_lane(self) -> bool {
        matches!(self, Self::StepLane | Self::ObservationLane)
    }

    /// Whether a value of this rate may read one of rate `operand`.
    pub fn may_read(self, operand: Self) -> bool {
        match self {
            Self::Constant | Self::Setup => operand <= self,
            Self::Step | Self::Observation | Self::Instant | Self::Law => {
                operand <= Self::Setup || operand == self
            }
            Self::StepLane => operand <= Self::Step || operand == self,
            Self::ObservationLane => {
                operand <= Self::Setup || operand == Self::Observation || operand == self
            }
        }
    }
}

impl fmt::Display for Rate {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Self::Constant => "constant",
            Self::Setup => "setup",
            Self::Step => "step",
            Self::Observation => "observation",
            Self::Instant => "instant",
            Self::Law => "law",
            Self::StepLane => "step lane",
            Self::ObservationLane => "observation lane",
        })
    }
}
