//! The author's `scheme = "..."`: honoured, or refused with a reason.

use std::collections::BTreeMap;
use std::rc::Rc;

use super::approximate::{Choice, Context};
use super::own_law::{OwnLaw, OwnLaws};
use super::{Group, SchemeName, areas, implicit, square_root};
use crate::calculus::Dynamics;
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::model::Model;
use crate::symbolic::Bound;

/// The approximate scheme asked for, if it is one that can be carried out.
pub(super) fn scheme(model: &Model, state: usize) -> Option<SchemeName> {
    let (asked, _) = model.states[state].scheme?;
    let available = matches!(
        asked,
        SchemeName::EulerMaruyama
            | SchemeName::Milstein
            | SchemeName::AntitheticMilstein
            | SchemeName::StrongTaylor15
            | SchemeName::DriftImplicitEuler
            | SchemeName::TamedEuler
            | SchemeName::TamedMilstein
            | SchemeName::FullTruncationEuler
            | SchemeName::RungeKutta4
    );
    available.then_some(asked)
}

/// The approximate scheme asked for, if it can be carried out for this state.
pub(super) fn honoured(context: &Context<'_>, state: usize, choice: &Choice) -> Option<SchemeName> {
    let model = context.model;
    let asked = scheme(model, state)?;
    let possible = match asked {
        SchemeName::Milstein | SchemeName::AntitheticMilstein => {
            no_milstein(context, state, choice).is_none()
        }
        SchemeName::TamedMilstein => no_products(model, choice).is_none(),
        SchemeName::StrongTaylor15 => no_taylor(model, choice).is_none(),
        SchemeName::DriftImplicitEuler => matches!(&context.implicit[state], Some(Ok(_))),
        SchemeName::RungeKutta4 => choice.is_flow(),
        SchemeName::FullTruncationEuler => truncates(model, state),
        _ => true,
    };
    possible.then_some(asked)
}

fn truncates(model: &Model, state: usize) -> bool {
    has_finite_end(model, state) && model.states[state].through.is_none()
}

/// The states that leave the exact laws because another scheme was asked for.
pub(super) fn excluded(model: &Model) -> BTreeMap<usize, String> {
    let asked = |i: usize| Some((i, format!("{} was asked for", scheme(model, i)?)));
    (0..model.states.len()).filter_map(asked).collect()
}

/// Per state, where the drift-implicit scheme was asked for, its coordinate or why it does not fit.
pub(super) fn implicit(
    model: &Model,
    dynamics: &Dynamics,
) -> Vec<Option<Result<implicit::Found, String>>> {
    let found = |state: usize| {
        let asked = scheme(model, state) == Some(SchemeName::DriftImplicitEuler);
        asked.then(|| implicit::coordinate(model, dynamics, state))
    };
    (0..model.states.len()).map(found).collect()
}

/// Reports the overrides that cannot be honoured.
pub(super) fn check(
    context: &Context<'_>,
    laws: &OwnLaws,
    groups: &[Group],
    choices: &BTreeMap<usize, Rc<Choice>>,
    diagnostics: &mut Diagnostics,
) {
    let model = context.model;
    for (i, state) in model.states.iter().enumerate() {
        let Some((asked, span)) = state.scheme else {
            continue;
        };
        let group = groups.iter().find(|g| g.states.contains(&i));
        let reason = match asked {
            SchemeName::Exact => context.refusals[i].clone(),
            SchemeName::Milstein | SchemeName::AntitheticMilstein => {
                choices.get(&i).and_then(|c| no_milstein(context, i, c))
            }
            SchemeName::TamedMilstein => choices.get(&i).and_then(|c| no_products(model, c)),
            SchemeName::StrongTaylor15 => choices.get(&i).and_then(|c| no_taylor(model, c)),
            SchemeName::RungeKutta4 if !context.calm[i] => Some(format!(
                "{} is random; this scheme is for states that nothing random reaches",
                state.name
            )),
            SchemeName::RungeKutta4 => choices.get(&i).filter(|c| c.ruled).map(|_| {
                "its slopes within a step do not see the end that absorbs or reflects".to_owned()
            }),
            SchemeName::FullTruncationEuler if !has_finite_end(model, i) => Some(format!(
                "the domain of {} has no finite end to truncate at",
                state.name
            )),
            SchemeName::FullTruncationEuler if state.through.is_some() => Some(
                "full truncation steps the state itself, not the coordinate of `through`"
                    .to_owned(),
            ),
            SchemeName::QuadraticExponential => no_moments(model, &laws[i]),
            SchemeName::DriftImplicitEuler => match &context.implicit[i] {
                Some(Err(reason)) => Some(reason.clone()),
                _ => None,
            },
            SchemeName::ConditionalGaussian if !context.carried[i] => Some(format!(
                "{} is not normal given a square-root process of the model",
                state.name
            )),
            SchemeName::ConditionalGaussian
            | SchemeName::EulerMaruyama
            | SchemeName::TamedEuler
            | SchemeName::FullTruncationEuler => None,
        };
        if let Some(reason) = reason {
            let chosen = group.map_or(SchemeName::EulerMaruyama, |g| g.scheme);
            let message = format!("`{asked}` cannot be used for {}: {reason}", state.name);
            diagnostics.push(
                Diagnostic::error(Code::SchemeRefused, span, message).hint(hint(asked, chosen)),
            );
        }
    }
}

fn hint(asked: SchemeName, chosen: SchemeName) -> String {
    if asked != SchemeName::Exact {
        // What was chosen here was chosen among approximate schemes: without the request it may be an exact law.
        "leave `scheme` out for the compiler's own choice, or use `euler_maruyama`".to_owned()
    } else {
        format!("leave `scheme` out to have `{chosen}`, or use `euler_maruyama`")
    }
}

fn no_moments(model: &Model, law: &Result<OwnLaw, Option<String>>) -> Option<String> {
    match law {
        Ok(OwnLaw::SquareRoot(law)) => square_root::no_moments(model, law),
        Err(Some(reason)) => Some(reason.clone()),
        Ok(OwnLaw::RandomDrift(_)) | Err(None) => {
            Some("it is for square-root processes".to_owned())
        }
    }
}

/// Why Milstein's scheme does not fit, with Levy areas where the noise does not commute.
fn no_milstein(context: &Context<'_>, state: usize, choice: &Choice) -> Option<String> {
    let clashes = choice.clash.is_some();
    kinked(choice).or_else(|| clashes.then(|| areas::used_up(context, state)).flatten())
}

fn kinked(choice: &Choice) -> Option<String> {
    let name = choice.kink?.name();
    Some(format!(
        "a coefficient has a kink (`{name}`), and Milstein's term needs derivatives"
    ))
}

/// Why a scheme does not fit that has products of increments and no Levy areas.
fn no_products(model: &Model, choice: &Choice) -> Option<String> {
    kinked(choice).or_else(|| clashing(model, choice))
}

fn clashing(model: &Model, choice: &Choice) -> Option<String> {
    let (state, clash) = choice.clash.as_ref()?;
    Some(super::reasons::clash(model, *state, clash))
}

/// Why the strong Taylor scheme of order 1.5 does not fit.
fn no_taylor(model: &Model, choice: &Choice) -> Option<String> {
    no_products(model, choice).or_else(|| {
        let reason = "its terms of order 1.5 need integrals over products of drivers, or of the noise of an exact \
                      law, which are not drawn: it is for additive noise and for one driver";
        (!choice.taylor).then(|| reason.to_owned())
    })
}

fn has_finite_end(model: &Model, state: usize) -> bool {
    let domain = model.states[state].domain;
    domain.lower != Bound::Infinite || domain.upper != Bound::Infinite
}
