//! States stepped by their normal law given the square-root process that carries them.

use std::collections::BTreeMap;

use super::own_law::{OwnLaw, OwnLaws};
use super::step::Frame;
use super::{CarriedState, CarriedStep, Group, Kind, Method, SchemeName, overrides};
use crate::analysis::linear::Rows;
use crate::analysis::scalar::entangled;
use crate::analysis::square_root::{AtZero, Carried, SquareRoot, carried};
use crate::calculus::Dynamics;
use crate::model::Model;
use crate::symbolic::trace::Trace;

/// A state with the square-root process that carries it.
#[derive(Clone, Debug)]
pub(super) struct Passenger {
    /// The state of that process, by its index in the model.
    pub(super) carrier: usize,
    /// How the state follows it.
    pub(super) carried: Carried,
}

/// For each state the square-root process that carries it. A process carries no state while another state, which it does
/// not carry, shares its noise: see [`entangled`].
pub(super) fn passengers(
    model: &Model,
    dynamics: &Dynamics,
    rows: &Rows,
    findings: &OwnLaws,
) -> Vec<Option<Passenger>> {
    let mut found: Vec<Option<Passenger>> = vec![None; findings.len()];
    for (carrier, finding) in findings.iter().enumerate() {
        let Ok(OwnLaw::SquareRoot(law)) = finding else {
            continue;
        };
        // The relation between the values of y and its noise has fixed coefficients.
        if law.moving {
            continue;
        }
        let may = |i: usize| {
            i != carrier
                && rows[i].is_err()
                && found[i].is_none()
                && overrides::scheme(model, i).is_none()
        };
        let riders: BTreeMap<usize, Carried> = (0..findings.len())
            .filter(|&i| may(i))
            .filter_map(|i| Some((i, carried(model, dynamics, carrier, law, i)?)))
            .collect();
        let met = entangled(model, dynamics, carrier);
        if met.iter().all(|i| riders.contains_key(i)) {
            for (i, carried) in riders {
                found[i] = Some(Passenger { carrier, carried });
            }
        }
    }
    found
}

/// One group for each process that carries states.
pub(super) fn groups(
    model: &Model,
    frame: &Frame<'_>,
    passengers: &[Option<Passenger>],
    laws: &OwnLaws,
    refusals: &[Option<String>],
) -> Vec<Group> {
    let mut by_carrier: BTreeMap<usize, Vec<(usize, &Carried)>> = BTreeMap::new();
    for (state, passenger) in passengers.iter().enumerate() {
        if let Some(Passenger { carrier, carried }) = passenger {
            by_carrier
                .entry(*carrier)
                .or_default()
                .push((state, carried));
        }
    }
    by_carrier
        .into_iter()
        .filter_map(|(carrier, riders)| {
            let Ok(OwnLaw::SquareRoot(law)) = &laws[carrier] else {
                return None;
            };
            Some(group(model, frame, carrier, law, &riders, refusals))
        })
        .collect()
}

fn group(
    model: &Model,
    frame: &Frame<'_>,
    carrier: usize,
    law: &SquareRoot,
    riders: &[(usize, &Carried)],
    refusals: &[Option<String>],
) -> Group {
    let mut trace = Trace::default();
    for (_, carried) in riders {
        trace.steps.extend(carried.trace.steps.iter().cloned());
    }
    // Stopped at zero, the exponential moment of the process has no form that is used here.
    let moments = law.at_zero != AtZero::Absorbed;
    let state = |&(state, carried): &(usize, &Carried)| CarriedState {
        state,
        free: frame.write(carried.free),
        along: carried.along,
        shared: carried.shared,
        rest: carried.rest.clone(),
        rest_square: carried.rest_square,
        keeps_growth: carried.grows_freely && moments,
    };
    let states: Vec<CarriedState> = riders.iter().map(state).collect();
    let name = |i: usize| &model.states[i].name;
    let rejected = riders.iter().filter_map(|&(i, _)| {
        let reason = refusals[i].as_ref()?;
        Some((SchemeName::Exact, format!("{}: {reason}", name(i))))
    });
    Group {
        states: riders.iter().map(|&(i, _)| i).collect(),
        kind: Kind::Approximate,
        law: None,
        becomes: None,
        scheme: SchemeName::ConditionalGaussian,
        strong_order: None,
        weak_order: None,
        preserves_domain: true,
        reasons: reasons(model, carrier, law, &states, refusals),
        rejected: rejected
            .chain([(SchemeName::FullTruncationEuler, euler_bias(name(carrier)))])
            .collect(),
        trace,
        method: Method::Carried(CarriedStep { carrier, states }),
    }
}

fn euler_bias(carrier: &str) -> String {
    format!(
        "Euler steps that take {carrier} at their start alone have a far larger bias at the same step (Andersen 2008, \
         section 5)"
    )
}

fn reasons(
    model: &Model,
    carrier: usize,
    law: &SquareRoot,
    states: &[CarriedState],
    refusals: &[Option<String>],
) -> Vec<String> {
    let pool = &model.pool;
    let y = pool.format(law.coordinate.forward);
    let mut found = Vec::new();
    for state in states {
        let name = &model.states[state.state].name;
        if let Some(reason) = &refusals[state.state] {
            found.push(format!("No exact law is known for {name}: {reason}."));
        }
    }
    let noisy = |s: &&CarriedState| {
        let own = s.rest.iter().chain([&s.shared]);
        own.into_iter().any(|&e| !pool.is_zero_literal(e))
    };
    let names: Vec<&str> = states
        .iter()
        .filter(noisy)
        .map(|s| model.states[s.state].name.as_str())
        .collect();
    if !names.is_empty() {
        found.push(format!(
            "Given the square-root process {y} at both ends of a step and its integral in between, what {} after \
             the step is normal in the coordinate of the scheme (Broadie and Kaya 2006, section 3).",
            match names[..] {
                [one] => format!("{one} is"),
                _ => format!("{} are", names.join(", ")),
            }
        ));
    }
    found.push(format!(
        "The integral of {y} over a step is taken by the trapezoidal rule (Andersen 2008, section 4)."
    ));
    for state in states {
        let name = &model.states[state.state].name;
        if state.keeps_growth {
            found.push(format!(
                "The mean of {name} over a step is kept exactly (Andersen 2008, section 4.3), unless the exponential moment \
                 that this takes is infinite."
            ));
        }
        if !pool.is_zero_literal(state.shared) {
            found.push(format!(
                "The noise that {name} has in common with {} follows from the values of {y}: ({}) int sqrt({y}) dB.",
                model.states[carrier].name,
                pool.format(state.shared)
            ));
        }
    }
    found.push(
        "The rule for the integral is the only error of a step, no order has been proved for it: check the step by halving it."
            .to_owned(),
    );
    found
}
