//! Everything that can go wrong, in words for the person who has to mend it.

use std::borrow::Cow;
use std::fmt;

use crate::interval::Interval;

/// Why a set of parameter values was refused.
#[derive(Clone, Debug, PartialEq)]
pub enum ParameterError {
    /// A parameter is not a finite number.
    NotFinite {
        /// The parameter.
        name: Cow<'static, str>,
        /// Its value.
        value: f64,
    },
    /// A parameter lies outside its declared range.
    OutOfRange {
        /// The parameter.
        name: Cow<'static, str>,
        /// Its value.
        value: f64,
        /// The declared range.
        range: Interval,
    },
    /// A declared assumption does not hold.
    Assumption {
        /// The name of the assumption.
        name: Cow<'static, str>,
        /// Its formula.
        text: Cow<'static, str>,
    },
    /// A state starts outside its domain, or at a value that is not finite.
    InitialOutsideDomain {
        /// The state.
        state: Cow<'static, str>,
        /// Its value at time 0.
        value: f64,
        /// The domain.
        domain: Interval,
    },
    /// The correlations of the drivers form no correlation matrix.
    CorrelationNotPositiveSemidefinite,
}

impl fmt::Display for ParameterError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            ParameterError::NotFinite { name, value } => write!(
                f,
                "parameter `{name}` is {value}: give it a finite number"
            ),
            ParameterError::OutOfRange { name, value, range } => write!(
                f,
                "parameter `{name}` is {value}, outside its range {range}"
            ),
            ParameterError::Assumption { name, text } => write!(
                f,
                "assumption `{name}` does not hold: {text} is false for these parameters"
            ),
            ParameterError::InitialOutsideDomain {
                state,
                value,
                domain,
            } => write!(
                f,
                "state `{state}` starts at {value}, outside its domain {domain}"
            ),
            ParameterError::CorrelationNotPositiveSemidefinite => f.write_str(
                "the correlations of the drivers are contradictory: their matrix is not positive semidefinite",
            ),
        }
    }
}

impl std::error::Error for ParameterError {}

/// Checks a parameter against its range; generated constructors call it.
///
/// # Errors
/// [`ParameterError::NotFinite`] or [`ParameterError::OutOfRange`].
///
/// ```
/// use driftwright_runtime::{Interval, check_range};
/// let range = Interval::new(0.0, false, f64::INFINITY, false);
/// assert!(check_range("sigma", 0.2, range).is_ok());
/// let message = check_range("sigma", -0.2, range).unwrap_err().to_string();
/// assert_eq!(message, "parameter `sigma` is -0.2, outside its range (0, inf)");
/// ```
pub fn check_range(
    name: impl Into<Cow<'static, str>>,
    value: f64,
    range: Interval,
) -> Result<(), ParameterError> {
    if !value.is_finite() {
        let name = name.into();
        return Err(ParameterError::NotFinite { name, value });
    }
    if range.contains(value) {
        return Ok(());
    }
    let name = name.into();
    Err(ParameterError::OutOfRange { name, value, range })
}

/// Checks the value of a state at time 0 against its domain; generated constructors call it.
///
/// # Errors
/// [`ParameterError::InitialOutsideDomain`].
pub fn check_initial(
    state: impl Into<Cow<'static, str>>,
    value: f64,
    domain: Interval,
) -> Result<(), ParameterError> {
    if domain.contains(value) {
        return Ok(());
    }
    let state = state.into();
    Err(ParameterError::InitialOutsideDomain {
        state,
        value,
        domain,
    })
}

/// Why the coefficients of a step or an observation do not exist.
#[derive(Clone, Debug, PartialEq)]
pub enum StepError {
    /// A covariance or correlation matrix has a negative direction.
    NotPositiveSemidefinite {
        /// The row, counted from 0, at which the factorisation met a negative pivot.
        row: usize,
        /// The pivot, in units of the matrix's own diagonal entry.
        pivot: f64,
    },
    /// A coefficient is not a finite number.
    NotFinite {
        /// What was computed.
        name: Cow<'static, str>,
        /// What came out.
        value: f64,
    },
    /// The coefficients of an exact law could not be integrated over a step.
    Unresolved {
        /// Time at the start of the step.
        start: f64,
        /// Length of the step.
        length: f64,
    },
}

impl fmt::Display for StepError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            StepError::NotPositiveSemidefinite { row, pivot } => write!(
                f,
                "a covariance is not positive semidefinite (row {}, relative pivot {pivot:e})",
                row + 1
            ),
            StepError::NotFinite { name, value } => write!(
                f,
                "{name} is {value}: the coefficients overflow or leave their domain"
            ),
            StepError::Unresolved { start, length } => write!(
                f,
                "the coefficients between t = {start} and t = {} could not be integrated to rounding accuracy: \
                 they are singular there, or decay so fast that the law needs shorter steps",
                start + length
            ),
        }
    }
}

impl std::error::Error for StepError {}
