//! States stepped by a law of their own that is not Gaussian.

use std::collections::BTreeMap;

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

/// For each state without a Gaussian coordinate its own law, or why there is none. `excluded` are
/// left out: the author has asked for another scheme.
pub(super) fn laws(
    model: &Model,
    dynamics: &Dynamics,
    rows: &Rows,
    excluded: &BTreeMap<usize, String>,
) -> Vec<Result<OwnLaw, Option<String>>> {
    let law = |state: usize| {
        if rows[state].is_ok() || excluded.contains_key(&state) {
            return Err(None);
        }
        let law = find(model, dynamics, state)?;
        match entangled(model, dynamics, state, law.described()) {
            Some(reason) => Err(Some(reason)),
            None => Ok(law),
        }
    };
    (0..model.states.len()).map(law).collect()
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
