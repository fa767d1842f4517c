//! The coefficients of one-step schemes, in the coordinates.

use std::collections::BTreeMap;

use super::edges::{self, Projection};
use super::{Coordinate, SchemeName, StateStep, Taylor, areas, implicit};
use crate::analysis::commute::{along_noise, relevant_drivers};
use crate::analysis::coordinate::{Candidate, auxiliary, candidates, through};
use crate::analysis::dependence::mentioned;
use crate::analysis::growth::{Growth, growth};
use crate::calculus::{Dynamics, Process, expand};
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Function, Symbol};

/// A state's coordinate with its process.
pub(super) fn coordinate(
    model: &Model,
    state: usize,
    candidate: &Candidate,
    process: Process,
) -> Coordinate {
    Coordinate {
        state,
        symbol: candidate.symbol,
        forward: candidate.forward,
        inverse: candidate.inverse,
        identity: candidate.is_identity(),
        image: edges::image(model, state, candidate.forward),
        process,
    }
}

/// The coordinate a one-step scheme works in: the author's; else one that takes an open domain onto the line, where that
/// makes no coefficient steep; else the state itself, projected to its domain where its coefficients need
/// that. Also Ito's rule on it, where it was needed. `calm`: nothing random reaches the state; `has_law`: it will
/// not be stepped by such a scheme.
pub(super) fn step_coordinate(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
    calm: bool,
    has_law: bool,
) -> (Coordinate, Projection, Trace) {
    let declared = &model.states[state];
    let own = dynamics.states[state].clone();
    if let Some(candidate) = through(model, declared).filter(|c| !c.is_identity()) {
        let expansion = expand(model, &dynamics.states, candidate.forward);
        let process = Process {
            drift: expansion.drift,
            diffusion: expansion.diffusion,
        };
        return (
            coordinate(model, state, &candidate, process),
            Projection::default(),
            expansion.trace,
        );
    }
    let mut identity = Candidate::identity(&model.pool, declared);
    let projection = edges::projection(model, dynamics, state, calm);
    if projection.is_none()
        && !has_law
        && let Some((free, process, trace)) = free_coordinate(model, dynamics, state)
    {
        return (coordinate(model, state, &free, process), projection, trace);
    }
    if !projection.is_none() {
        // The stored value may lie beyond the domain, so that its symbol must not have the state's range.
        identity.symbol = auxiliary(&model.pool, &declared.name);
        identity.inverse = projection.apply(model, model.pool.var(identity.symbol));
    }
    (
        coordinate(model, state, &identity, own),
        projection,
        Trace::default(),
    )
}

/// A coordinate that takes an open domain onto the line, such as a logarithm or a logit, and in which drift and noise are
/// globally Lipschitz as functions of it: no step leaves the domain then, and nothing is paid for that. Where
/// the author asked for a scheme, the scheme is for the state itself.
pub(super) fn free_coordinate(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
) -> Option<(Candidate, Process, Trace)> {
    let (pool, declared) = (&model.pool, &model.states[state]);
    let noisy = |&b: &Expr| !pool.is_zero_literal(b);
    let settled = declared.scheme.is_some() || declared.at_lower.or(declared.at_upper).is_some();
    if settled || !dynamics.states[state].diffusion.iter().any(noisy) {
        return None;
    }
    let tried = candidates(model, declared, None).into_iter();
    tried
        .filter(|c| c.onto_line && !c.is_identity())
        .find_map(|candidate| {
            let expansion = expand(model, &dynamics.states, candidate.forward);
            let back = [(declared.symbol, candidate.inverse)].into_iter().collect();
            let calm = |&e: &Expr| {
                let written = pool.simplify(pool.substitute(e, &back));
                growth(pool, written, &[candidate.symbol]) == Growth::Lipschitz
            };
            let mut coefficients = expansion.diffusion.iter().chain([&expansion.drift]);
            coefficients.all(calm).then(|| {
                let process = Process {
                    drift: expansion.drift,
                    diffusion: expansion.diffusion.clone(),
                };
                (candidate, process, expansion.trace)
            })
        })
}

/// Rewrites formulas in the states as formulas in the coordinates.
pub(super) struct Frame<'a> {
    model: &'a Model,
    inverses: BTreeMap<Symbol, Expr>,
}

impl<'a> Frame<'a> {
    pub(super) fn new(model: &'a Model, coordinates: &[Coordinate]) -> Self {
        let moved = coordinates.iter().filter(|c| !c.identity);
        let inverses = moved
            .map(|c| (model.states[c.state].symbol, c.inverse))
            .collect();
        Self { model, inverses }
    }

    /// A formula in the states as one in the coordinates, simplified.
    pub(super) fn write(&self, e: Expr) -> Expr {
        let pool = &self.model.pool;
        pool.simplify(pool.substitute(e, &self.inverses))
    }
}

/// The step of one state: drift and diffusion of its coordinate, and Milstein's terms if asked for.
pub(super) fn state_step(
    model: &Model,
    dynamics: &Dynamics,
    coordinate: &Coordinate,
    frame: &Frame<'_>,
    scheme: SchemeName,
) -> StateStep {
    let state = coordinate.state;
    let (lower, upper) = edges::rules(model, state, coordinate.forward);
    let process = &coordinate.process;
    let terms = match scheme {
        SchemeName::Milstein | SchemeName::TamedMilstein | SchemeName::StrongTaylor15 => {
            areas::terms(model, dynamics, &process.diffusion, frame)
        }
        SchemeName::AntitheticMilstein => areas::Terms {
            areas: Vec::new(),
            ..areas::terms(model, dynamics, &process.diffusion, frame)
        },
        _ => areas::Terms::default(),
    };
    StateStep {
        state,
        drift: frame.write(process.drift),
        diffusion: process.diffusion.iter().map(|&b| frame.write(b)).collect(),
        milstein: terms.products,
        areas: terms.areas,
        implicit: (scheme == SchemeName::DriftImplicitEuler).then(|| {
            implicit::solution(&model.pool, frame.write(process.drift), coordinate.symbol)
        }),
        taming: None,
        taylor: match scheme {
            SchemeName::StrongTaylor15 => Some(taylor(model, dynamics, process, frame)),
            _ => None,
        },
        lower,
        upper,
    }
}

/// The size of the drift of states stepped together, by which the tamed schemes hold it back: the
/// Euclidean norm (Hutzenthaler, Jentzen and Kloeden 2012, equation 4).
pub(super) fn size(model: &Model, steps: &[StateStep]) -> Expr {
    let pool = &model.pool;
    match steps {
        [only] => pool.call(Function::Abs, &[only.drift]),
        _ => pool.sqrt(
            pool.sum(
                steps
                    .iter()
                    .map(|s| pool.square(s.drift))
                    .collect::<Vec<_>>(),
            ),
        ),
    }
}

/// The terms of order 1.5, for noise that is additive or has one driver alone.
fn taylor(model: &Model, dynamics: &Dynamics, process: &Process, frame: &Frame<'_>) -> Taylor {
    let pool = &model.pool;
    let generator = |e: Expr| expand(model, &dynamics.states, e).drift;
    let read = mentioned(model, process.drift).into_iter();
    let of_drift = read.flat_map(|i| dynamics.states[i].diffusion.iter().enumerate());
    let mut drivers = relevant_drivers(model, dynamics, &process.diffusion);
    drivers.extend(
        of_drift
            .filter(|(_, b)| !pool.is_zero_literal(**b))
            .map(|(j, _)| j),
    );
    drivers.sort_unstable();
    drivers.dedup();
    let mixed = drivers.iter().map(|&j| {
        let along = along_noise(model, dynamics, j, process.drift);
        let moved = generator(process.diffusion[j]);
        (j, frame.write(along), frame.write(moved))
    });
    let present = |&(_, along, moved): &(usize, Expr, Expr)| {
        !(pool.is_zero_literal(along) && pool.is_zero_literal(moved))
    };
    let cubic = match drivers[..] {
        [j] => {
            let once = along_noise(model, dynamics, j, process.diffusion[j]);
            let twice = frame.write(along_noise(model, dynamics, j, once));
            (!pool.is_zero_literal(twice)).then_some((j, twice))
        }
        _ => None,
    };
    Taylor {
        drift: frame.write(generator(process.drift)),
        mixed: mixed.filter(present).collect(),
        cubic,
    }
}
