//! States stepped by a law of their own that is not Gaussian.

use std::collections::BTreeMap;

use super::carried::Passenger;
use super::{Group, random_drift, square_root};
use crate::analysis::coordinate::Candidate;
use crate::analysis::linear::Rows;
use crate::analysis::random_drift::{RandomDrift, find as random_drift_law};
use crate::analysis::scalar::{Finding, entangled};
use crate::analysis::square_root::{SquareRoot, find as square_root_law};
use crate::calculus::{Dynamics, Process};
use crate::model::Model;

/// The law of a state by itself.
pub(super) enum OwnLaw {
    SquareRoot(Box<SquareRoot>),
    RandomDrift(Box<RandomDrift>),
}

impl OwnLaw {
    /// The coordinate in which the law is drawn, with its process.
    pub(super) fn coordinate(&self) -> (&Candidate, &Process) {
        match self {
            Self::SquareRoot(law) => (&law.coordinate, &law.process),
            Self::RandomDrift(law) => (&law.coordinate, &law.process),
        }
    }

    /// What the transition is, in words.
    fn described(&self) -> &'static str {
        match self {
            Self::SquareRoot(_) => "a noncentral chi-square transition",
            Self::RandomDrift(_) => "the transition of a Brownian motion with a random drift",
        }
    }

    /// The group of the state.
    pub(super) fn group(
        &self,
        model: &Model,
        frame: &super::step::Frame<'_>,
        state: usize,
    ) -> Group {
        match self {
            Self::SquareRoot(law) => square_root::group(model, state, law),
            Self::RandomDrift(law) => random_drift::group(model, frame, state, law),
        }
    }
}

/// For each state its own law, or why there is none.
pub(super) type OwnLaws = Vec<Result<OwnLaw, Option<String>>>;

/// For each state without a Gaussian coordinate its own law, whoever shares its noise. `excluded` are
/// left out: the author has asked for another scheme.
pub(super) fn findings(
    model: &Model,
    dynamics: &Dynamics,
    rows: &Rows,
    excluded: &BTreeMap<usize, String>,
) -> OwnLaws {
    let finding = |state: usize| match rows[state].is_ok() || excluded.contains_key(&state) {
        true => Err(None),
        false => find(model, dynamics, state),
    };
    (0..model.states.len()).map(finding).collect()
}

/// The laws that a step can be drawn from: every state that shares the noise of one must be carried by it.
pub(super) fn drawn(
    model: &Model,
    dynamics: &Dynamics,
    findings: OwnLaws,
    passengers: &[Option<Passenger>],
) -> OwnLaws {
    let carries = |state: usize, other: usize| {
        let carrier = passengers[other].as_ref().map(|p| p.carrier);
        carrier == Some(state)
    };
    let settle = |(state, finding): (usize, Result<OwnLaw, Option<String>>)| {
        let law = finding?;
        let met = entangled(model, dynamics, state);
        match met.into_iter().find(|&other| !carries(state, other)) {
            Some(other) => Err(Some(shared(model, &law, state, other))),
            None => Ok(law),
        }
    };
    findings.into_iter().enumerate().map(settle).collect()
}

fn shared(model: &Model, law: &OwnLaw, state: usize, other: usize) -> String {
    let (name, other) = (&model.states[state].name, &model.states[other].name);
    let described = law.described();
    let mut reason = format!(
        "{name} by itself has {described}, but its noise is shared or correlated with that of {other}, and no exact \
         joint transition of both is known"
    );
    if let OwnLaw::SquareRoot(law) = law
        && !model.pool.sign(law.square).is_positive()
    {
        let square = model.pool.format(law.square);
        reason.push_str(&format!(
            " (with a `range` that keeps {square} positive, {other} may be normal given {name})"
        ));
    }
    reason
}

fn find(model: &Model, dynamics: &Dynamics, state: usize) -> Result<OwnLaw, Option<String>> {
    match square_root_law(model, dynamics, state) {
        Finding::Law(law) => return Ok(OwnLaw::SquareRoot(law)),
        Finding::Refused(reason) => return Err(Some(reason)),
        Finding::Other => {}
    }
    match random_drift_law(model, dynamics, state) {
        Finding::Law(law) => Ok(OwnLaw::RandomDrift(law)),
        Finding::Refused(reason) => Err(Some(reason)),
        Finding::Other => Err(None),
    }
}
