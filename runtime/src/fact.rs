//! Facts of a model that hang on parameter values.

use std::borrow::Cow;

/// A statement about a model that is true for some parameter values only, and whether it is at those of a simulator.
///
/// ```
/// use driftwright_runtime::Fact;
/// let (kappa, theta, sigma) = (2.0, 0.04, 0.5);
/// let fact = Fact::new(
///     "v does not attain 0",
///     "2*kappa*theta >= sigma^2",
///     2.0 * kappa * theta >= sigma * sigma,
/// );
/// assert_eq!(
///     fact.to_string(),
///     "not at these values: v does not attain 0 (if and only if 2*kappa*theta >= sigma^2)"
/// );
/// ```
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fact {
    /// The statement, in words.
    pub statement: Cow<'static, str>,
    /// The statement is true if and only if this condition on the parameters holds.
    pub condition: Cow<'static, str>,
    /// Whether the condition holds, as far as double precision tells.
    pub holds: bool,
}

impl Fact {
    /// A fact with texts known at compile time.
    #[must_use]
    pub const fn new(statement: &'static str, condition: &'static str, holds: bool) -> Fact {
        Fact {
            statement: Cow::Borrowed(statement),
            condition: Cow::Borrowed(condition),
            holds,
        }
    }
}

impl std::fmt::Display for Fact {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let Fact {
            statement,
            condition,
            holds,
        } = self;
        let verdict = if *holds {
            "at these values"
        } else {
            "not at these values"
        };
        write!(f, "{verdict}: {statement} (if and only if {condition})")
    }
}
