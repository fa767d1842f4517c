//! How each state is stepped, why, and what was rejected.
//!
//! [`plan`] first looks for the largest linear Gaussian system ([`crate::analysis::linear`]) and steps it
//! by its exact law, then for states that have a law of their own: square-root processes
//! ([`crate::analysis::square_root`]), whose transition is noncentral chi-square, and Brownian motions with a
//! random drift ([`crate::analysis::random_drift`]), then for states that are normal given a square-root process
//! and for pairs moved by commuting linear flows ([`crate::analysis::linear_flow`]). What is left is stepped by the scheme of highest strong order that its noise
//! allows (drift-implicit Euler where it alone keeps a state on an open domain inside): Milstein where the noise commutes, Euler-Maruyama where it does not (Milstein with Levy areas on request), Euler with full
//! truncation at square-root-like ends, Runge-Kutta where nothing is random. The author may override.

mod approximate;
mod areas;
mod carried;
mod closed_ends;
mod edges;
mod exact;
mod implicit;
mod linear_flow;
mod noise;
mod normal_law;
mod overrides;
mod own_law;
mod plan;
mod random_drift;
mod reasons;
mod square_root;
mod step;
mod warn;

use self::carried::Passenger;
use self::own_law::OwnLaws;
use crate::analysis::dependence::deterministic;
use crate::analysis::{self, linear};
use crate::calculus::Dynamics;
use crate::diagnostic::Diagnostics;
use crate::model::Model;
use crate::symbolic::Interval;

pub use crate::model::SchemeName;
pub use plan::{
    Becomes, CarriedState, CarriedStep, Component, Coordinate, Drawn, EdgeRule, Group, Implicit,
    Kind, Law, LinearGaussian, Method, NoiseComponent, NoisePlan, Order, Plan, RandomDriftStep,
    RowNoise, SquareRootStep, StateStep, Taylor,
};

/// Plans how the states of a model are stepped.
///
/// Overrides that cannot be honoured, a `through` that cannot be inverted and open ends that may be
/// reached go to `diagnostics`; the plan is complete in any case.
pub fn plan(model: &Model, dynamics: &Dynamics, diagnostics: &mut Diagnostics) -> Plan {
    warn::coordinates(model, diagnostics);
    closed_ends::warn(model, dynamics, diagnostics);
    let excluded = overrides::excluded(model);
    let rows = linear::find(model, dynamics, &excluded);
    let findings = own_law::findings(model, dynamics, &rows, &excluded);
    let passengers = carried::passengers(model, dynamics, &rows, &findings);
    let laws = own_law::drawn(model, dynamics, findings, &passengers);
    let calm = deterministic(model, dynamics);
    let has_law = |i: usize| rows[i].is_ok() || laws[i].is_ok() || passengers[i].is_some();
    let lawless = |&i: &usize| !has_law(i) && !excluded.contains_key(&i);
    let lawless: Vec<usize> = (0..model.states.len()).filter(lawless).collect();
    let flows = analysis::linear_flow::find(model, dynamics, &lawless);
    let mut implicit = overrides::implicit(model, dynamics);
    for &i in &lawless {
        if !flows.iter().any(|flow| flow.states.contains(&i)) {
            implicit[i] = implicit::chosen(model, dynamics, i).map(Ok);
        }
    }
    let steps: Vec<_> = (0..model.states.len())
        .map(|i| {
            if let Some(Ok(found)) = &implicit[i] {
                return found.step_coordinate(model, i);
            }
            let moved = flows.iter().any(|flow| flow.states.contains(&i));
            step::step_coordinate(model, dynamics, i, calm[i], has_law(i) || moved)
        })
        .collect();
    let coordinates: Vec<Coordinate> = rows
        .iter()
        .zip(&laws)
        .zip(&passengers)
        .zip(&steps)
        .enumerate()
        .map(|(i, (((row, law), passenger), step))| {
            let (candidate, process) = match (row, law, passenger) {
                (Ok(row), ..) => (&row.coordinate, &row.process),
                (_, Ok(law), _) => law.coordinate(),
                (.., Some(Passenger { carried, .. })) => (&carried.coordinate, &carried.process),
                _ => return step.0.clone(),
            };
            step::coordinate(model, i, candidate, process.clone())
        })
        .collect();
    announce_ranges(model, &coordinates);
    let projections: Vec<_> = steps.iter().map(|step| step.1).collect();
    let traces: Vec<_> = steps.iter().map(|step| step.2.clone()).collect();
    let context = approximate::Context {
        model,
        dynamics,
        coordinates: &coordinates,
        projections: &projections,
        traces: &traces,
        calm,
        refusals: refusals(&rows, &laws, &flows),
        own_law: laws.iter().map(Result::is_ok).collect(),
        carried: passengers.iter().map(Option::is_some).collect(),
        implicit,
    };
    let mut groups = exact::groups(model, dynamics, &rows);
    let frame = step::Frame::new(model, &coordinates);
    let found = laws
        .iter()
        .enumerate()
        .filter_map(|(i, law)| Some(law.as_ref().ok()?.group(model, &frame, i)));
    groups.extend(found);
    groups.extend(carried::groups(
        model,
        &frame,
        &passengers,
        &laws,
        &context.refusals,
    ));
    groups.extend(
        flows
            .into_iter()
            .map(|flow| linear_flow::group(model, flow)),
    );
    let choices = context.choices();
    groups.extend(context.groups(&choices));
    groups.sort_by_key(|g| g.states.first().copied());
    overrides::check(&context, &laws, &groups, &choices, diagnostics);
    warn::open_ends(model, dynamics, &groups, diagnostics);
    let noise = noise::plan(model, &groups);
    Plan {
        coordinates,
        groups,
        noise,
    }
}

/// Per state, why it has no exact law; none where it has one.
fn refusals(
    rows: &linear::Rows,
    laws: &OwnLaws,
    flows: &[analysis::linear_flow::LinearFlow],
) -> Vec<Option<String>> {
    let flows = |state: usize| flows.iter().any(|flow| flow.states.contains(&state));
    let refusal = |(i, (row, law)): (usize, (&Result<linear::Row, String>, _))| match (row, law) {
        _ if flows(i) => None,
        (Ok(_), _) | (_, &Ok(_)) => None,
        (_, Err(Some(reason))) | (Err(reason), Err(None)) => Some(reason.clone()),
    };
    rows.iter().zip(laws).enumerate().map(refusal).collect()
}

/// Tells the algebra which values the coordinates take. A projected state's stored value may take any.
fn announce_ranges(model: &Model, coordinates: &[Coordinate]) {
    let moved = |c: &&Coordinate| c.forward != model.pool.var(model.states[c.state].symbol);
    let images: Vec<_> = coordinates
        .iter()
        .filter(moved)
        .map(|c| (c.symbol, c.image.unwrap_or(Interval::REAL)))
        .collect();
    model.pool.set_ranges(images);
}
