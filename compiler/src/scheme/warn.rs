//! What the author should know of a model's coordinates and open ends.

use super::edges;
use super::{Group, Law};
use crate::analysis::asymptotics::Side;
use crate::analysis::boundary::{End, classify};
use crate::analysis::condition::{self, Relates};
use crate::analysis::coordinate::through;
use crate::analysis::end_rules;
use crate::analysis::sample;
use crate::calculus::Dynamics;
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::model::Model;
use crate::symbolic::{Bound, Sign};

/// Reports each `through` that cannot be inverted, is not monotone, or has no known value at an end that
/// absorbs or reflects.
pub(super) fn coordinates(model: &Model, diagnostics: &mut Diagnostics) {
    for (i, state) in model.states.iter().enumerate() {
        let Some(formula) = &state.through else {
            continue;
        };
        let complaint = if turns(model, i) {
            "it rises and falls on the state's domain"
        } else if through(model, state).is_none() {
            "its inverse could not be found in closed form"
        } else {
            let lost =
                end_rules::ruled(model, i).find(|rule| !edges::is_placed(model, i, rule.side));
            if let Some(rule) = lost {
                let (end, name) = (model.pool.format(rule.end), &state.name);
                let message = format!(
                    "what `{}` is at the end {end} of the domain of {name} was not found: `at_edge` cannot be followed",
                    formula.text
                );
                diagnostics.push(
                    Diagnostic::error(Code::BadCoordinate, formula.span, message)
                        .hint("give the parameters of the domain a range, or leave `through` out"),
                );
            }
            continue;
        };
        diagnostics.push(
            Diagnostic::error(
                Code::BadCoordinate,
                formula.span,
                format!(
                    "`{}` cannot be mapped back to {}: {complaint}",
                    formula.text, state.name
                ),
            )
            .hint("use a strictly monotone formula such as a logarithm, a power or a logit"),
        );
    }
}

/// Whether the derivative of a `through` was seen with both signs.
fn turns(model: &Model, state: usize) -> bool {
    let (pool, declared) = (&model.pool, &model.states[state]);
    let Some(formula) = &declared.through else {
        return false;
    };
    let slope = pool.derivative(formula.expr, declared.symbol);
    if matches!(pool.sign(slope), Sign::Positive | Sign::Negative) {
        return false;
    }
    let values = sample::values(pool, slope);
    values.iter().any(|&v| v > 0.0) && values.iter().any(|&v| v < 0.0)
}

/// Warns of open ends that are reached, or may be. A random state whose exact law stays in its domain
/// cannot get there.
pub(super) fn open_ends(
    model: &Model,
    dynamics: &Dynamics,
    groups: &[Group],
    diagnostics: &mut Diagnostics,
) {
    for &state in groups
        .iter()
        .filter(|g| !g.is_exact() || !g.preserves_domain || g.law == Some(Law::Deterministic))
        .flat_map(|g| &g.states)
    {
        let domain = model.states[state].domain;
        for (bound, side) in [(domain.lower, Side::Lower), (domain.upper, Side::Upper)] {
            if let Some(warning) = open_end(model, dynamics, state, bound, side) {
                diagnostics.push(warning);
            }
        }
    }
}

fn open_end(
    model: &Model,
    dynamics: &Dynamics,
    state: usize,
    bound: Bound,
    side: Side,
) -> Option<Diagnostic> {
    let (pool, declared) = (&model.pool, &model.states[state]);
    if matches!(bound, Bound::Closed(_)) {
        return None;
    }
    let end = match (bound.value(), side) {
        (Some(end), _) => pool.format(end),
        (None, Side::Lower) => "-inf".to_owned(),
        (None, Side::Upper) => "inf".to_owned(),
    };
    let span = declared.domain_span.unwrap_or(declared.span);
    let name = &declared.name;
    let warning = |message: String| Some(Diagnostic::warning(Code::OpenEndReached, span, message));
    let close = "close the end with a bracket and say with `at_edge` what happens there";
    match classify(model, dynamics, state, side) {
        End::NotReached => None,
        End::Reached if bound == Bound::Infinite => warning(format!(
            "{name} reaches {end} in finite time: its solution explodes"
        ))
        .map(|w| w.hint("check the sign of the fastest growing term of the drift")),
        // Far out the rules are short of logarithms and exponentials; silence there is no claim.
        End::Undecided(_) if bound == Bound::Infinite => None,
        End::Reached => warning(format!("{name} reaches the open end {end} of its domain"))
            .map(|w| w.hint(close)),
        End::Undecided(Some(alternatives)) => {
            let condition = condition::format(pool, &alternatives);
            let hint = match alternatives[..] {
                [ref all] if all.len() == 1 && all[0].relates != Relates::Equal => {
                    format!("add the assumption \"{condition}\", or close the end")
                }
                _ => close.to_owned(),
            };
            warning(format!(
                "{name} reaches the open end {end} of its domain unless {condition}"
            ))
            .map(|w| w.hint(hint))
        }
        End::Undecided(None) => warning(format!(
            "it could not be decided whether {name} reaches the open end {end} of its domain"
        ))
        .map(|w| w.hint(close)),
    }
}
