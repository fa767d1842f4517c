//! Groups of two states moved by commuting linear flows.

use super::{Becomes, Group, Kind, Method, SchemeName};
use crate::analysis::linear_flow::{LinearFlow, Motion};
use crate::model::Model;

/// The group of a pair.
pub(super) fn group(model: &Model, flow: LinearFlow) -> Group {
    let [x, y] = flow.states.map(|i| &model.states[i].name);
    let what = match flow.motion {
        Motion::Rotation => "turn and stretch",
        Motion::Hyperbolic => "stretch in one direction and squeeze in another",
        Motion::Shear => "shear and stretch",
    };
    Group {
        states: flow.states.to_vec(),
        kind: Kind::Exact,
        law: None,
        becomes: Some(Becomes::LinearFlow),
        scheme: SchemeName::Exact,
        strong_order: None,
        weak_order: None,
        preserves_domain: true,
        reasons: vec![
            format!(
                "Drift and noise of ({x}, {y}) are linear with matrices that commute, so that the solution is their \
                 exponential: what they do to ({x}, {y}), {what}, can be done one after the other."
            ),
            "Each step is that map of the drivers' increments: there is no discretisation error."
                .to_owned(),
        ],
        rejected: vec![(
            SchemeName::Milstein,
            "a discretisation has an error that the exact map does not have".to_owned(),
        )],
        trace: flow.trace.clone(),
        method: Method::LinearFlow(flow),
    }
}
