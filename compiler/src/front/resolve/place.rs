//! Places where formulas stand, and what each may hold.

use super::scope::Kind;
use crate::symbolic::Symbol;

/// A place of a formula.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Place {
    /// An end of a parameter's range.
    Range,
    /// An end of a state's domain.
    Domain,
    /// An assumption.
    Assumption,
    /// A correlation.
    Correlation,
    /// A value at time 0.
    Initial,
    /// A drift or a diffusion.
    Coefficient,
    /// The coordinate of the state with this symbol.
    Through(Symbol),
    /// A sub-expression of `[where]`.
    Where,
    /// A derived quantity.
    Derived,
    /// A readout.
    Readout,
    /// What a claim about drift, diffusion or martingales is about.
    ClaimedDynamics,
    /// A claimed drift or diffusion.
    DynamicsValue,
    /// What a claim about moments or laws is about.
    ClaimedMoment,
    /// A claimed moment.
    MomentValue,
}

impl Place {
    /// The place, for messages.
    pub(super) fn what(self) -> &'static str {
        match self {
            Self::Range => "a range",
            Self::Domain => "a domain",
            Self::Assumption => "an assumption",
            Self::Correlation => "a correlation",
            Self::Initial => "an initial value",
            Self::Coefficient => "a drift or diffusion",
            Self::Through(_) => "`through`",
            Self::Where => "a sub-expression",
            Self::Derived => "a derived quantity",
            Self::Readout => "a readout",
            Self::ClaimedDynamics => "a claim about dynamics",
            Self::DynamicsValue => "a claimed drift or diffusion",
            Self::ClaimedMoment => "a claim about moments",
            Self::MomentValue => "a claimed moment",
        }
    }

    /// What it may hold, for messages.
    pub(super) fn holds(self) -> &'static str {
        match self {
            Self::Range | Self::Domain | Self::Assumption | Self::Initial => "parameters only",
            Self::Correlation | Self::MomentValue => "`t` and parameters",
            Self::Coefficient | Self::Where => "`t`, parameters, states and sub-expressions",
            Self::Through(_) => "its own state, `t` and parameters",
            Self::Derived | Self::Readout | Self::ClaimedDynamics | Self::DynamicsValue => {
                "`t`, parameters, states, sub-expressions and derived quantities"
            }
            Self::ClaimedMoment => "`t`, parameters and all quantities of the model",
        }
    }

    pub(super) fn allows_time(self) -> bool {
        !matches!(
            self,
            Self::Range | Self::Domain | Self::Assumption | Self::Initial
        )
    }

    /// Whether the state with this symbol may be used.
    pub(super) fn allows_state(self, state: Symbol) -> bool {
        match self {
            Self::Through(own) => own == state,
            Self::Correlation | Self::MomentValue => false,
            _ => self.allows_time(),
        }
    }

    /// Whether names of a kind may be used at all. For states and sub-expressions
    /// [`Place::allows_state`] decides.
    pub(super) fn allows(self, kind: Kind) -> bool {
        match kind {
            Kind::Parameter | Kind::Where | Kind::State => true,
            Kind::Driver => false,
            Kind::Derived => matches!(
                self,
                Self::Derived
                    | Self::Readout
                    | Self::ClaimedDynamics
                    | Self::DynamicsValue
                    | Self::ClaimedMoment
            ),
            Kind::Readout => self == Self::ClaimedMoment,
        }
    }

    /// Whether Ito's rule is applied to it.
    pub(super) fn needs_derivatives(self) -> bool {
        matches!(
            self,
            Self::Through(_) | Self::Derived | Self::ClaimedDynamics
        )
    }
}
