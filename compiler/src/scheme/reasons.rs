//! What the planner tells people about an approximate scheme.

use super::approximate::{Choice, Context};
use super::{Method, SchemeName};
use crate::analysis::commute::Clash;
use crate::analysis::growth::{Growth, growth};
use crate::model::{AtEdge, Model};
use crate::symbolic::{Expr, Symbol};

/// Why the scheme, sentence by sentence.
pub(super) fn why(
    context: &Context<'_>,
    choice: &Choice,
    scheme: SchemeName,
    states: &[usize],
    method: &Method,
) -> Vec<String> {
    let model = context.model;
    let mut reasons: Vec<String> = states
        .iter()
        .filter_map(|&i| no_law(model, i, context.refusals[i].as_deref()?))
        .collect();
    for &i in states {
        if super::overrides::scheme(model, i) == Some(scheme) {
            reasons.push(format!(
                "The author asked for {scheme} for {}.",
                model.states[i].name
            ));
        }
        let coordinate = &context.coordinates[i];
        if coordinate.forward != model.pool.var(model.states[i].symbol) {
            let (name, forward) = (&model.states[i].name, model.pool.format(coordinate.forward));
            let why = if context.is_freed(i) {
                ", in which no step leaves the domain and its coefficients are globally Lipschitz in it"
            } else {
                ""
            };
            reasons.push(format!(
                "{name} is stepped in the coordinate {forward}{why}."
            ));
        }
        if let (Some(Ok(found)), SchemeName::DriftImplicitEuler) = (&context.implicit[i], scheme) {
            if found.chosen {
                reasons.push(steep(model, i));
            }
            reasons.extend(found.condition.clone());
        }
    }
    reasons.push(main_reason(context, choice, scheme, method));
    reasons.extend(states.iter().flat_map(|&i| ends(context, i, method)));
    reasons.extend(regularity(context, choice, method));
    let exceeded = model.pool.exceeded().into_iter();
    reasons.extend(exceeded.map(|limit| format!("A budget was exceeded: {limit}.")));
    reasons
}

/// Why the drift-implicit scheme is chosen for a state.
fn steep(model: &Model, state: usize) -> String {
    let name = &model.states[state].name;
    format!(
        "{name} does not come to an end of its open domain, but explicit schemes step beyond it in {name} itself, and where a \
         coordinate takes the domain onto the line or makes the noise constant the drift is too steep for them."
    )
}

fn no_law(model: &Model, state: usize, refusal: &str) -> Option<String> {
    let asked = super::overrides::scheme(model, state).is_some();
    (!asked).then(|| {
        format!(
            "No exact law is known for {}: {refusal}.",
            model.states[state].name
        )
    })
}

fn has_areas(method: &Method) -> bool {
    matches!(method, Method::Step(steps) if steps.iter().any(|s| !s.areas.is_empty()))
}

fn main_reason(
    context: &Context<'_>,
    choice: &Choice,
    scheme: SchemeName,
    method: &Method,
) -> String {
    let text = match scheme {
        SchemeName::RungeKutta4 if choice.projected => {
            "Nothing random reaches these states, so that they follow ordinary differential equations: the \
             classical fourth-order Runge-Kutta scheme. Coefficients are taken at the value projected to the \
             domain, and the projected value is what is observed."
        }
        SchemeName::RungeKutta4 => {
            "Nothing random reaches these states, so that they follow ordinary differential equations: the \
             classical fourth-order Runge-Kutta scheme."
        }
        SchemeName::FullTruncationEuler => {
            "An Euler step may cross an end of the domain at which the equation itself rules; the coefficients \
             are taken at the value projected to the domain, and the projected value is what is observed (Lord, \
             Koekkoek and van Dijk 2010). The scheme converges strongly for square-root processes, without a \
             rate that holds for all parameters, so no order is stated."
        }
        SchemeName::TamedEuler | SchemeName::TamedMilstein => {
            "The drift a enters as a h/(1 + h |a|): the tamed drift keeps the moments of the scheme bounded where \
             those of an explicit scheme diverge (Hutzenthaler, Jentzen and Kloeden 2012; Wang and Gan 2013 with \
             Milstein's term). Large steps slow a steep drift down: halve the step to see by how much."
        }
        SchemeName::DriftImplicitEuler => {
            "The drift is taken at the end of the step, in a coordinate whose noise does not depend on the states and whose \
             drift is one-sided Lipschitz: the equation of a step has one solution, inside the domain, as long as the step is \
             shorter than one over the largest slope of the drift (Alfonsi 2005; Dereich, Neuenkirch and Szpruch 2012)."
        }
        SchemeName::StrongTaylor15 if choice.additive => {
            "The noise does not depend on the states: the strong Taylor scheme of order 1.5 needs no more than \
             the increments of the drivers and their integrals over the step (Kloeden and Platen 1992, section \
             10.4)."
        }
        SchemeName::StrongTaylor15 => {
            "One driver: the strong Taylor scheme of order 1.5 needs no more than its increment and its \
             integral over the step (Kloeden and Platen 1992, section 10.4)."
        }
        SchemeName::AntitheticMilstein if choice.clash.is_some() => {
            "The noise does not commute, and the Levy areas of Milstein's scheme are left out: strong order 1/2. On coupled \
             paths (`multilevel` of the runtime), the mean of the fine path and its antithetic twin less the coarse path has \
             for smooth payoffs a variance of the order of the step squared (Giles and Szpruch 2014)."
        }
        SchemeName::Milstein if has_areas(method) => {
            "The noise does not commute: Milstein's scheme with Levy areas that are simulated given the increments, by as \
             many terms of their series, proportional to the root of one over the step, as strong order 1 takes (Wiktorsson \
             2001; Mrongowius and Roessler 2022)."
        }
        SchemeName::Milstein | SchemeName::AntitheticMilstein if choice.additive => {
            "The noise does not depend on the states: Milstein's term is zero, Milstein and Euler-Maruyama \
             coincide and have strong order 1."
        }
        SchemeName::Milstein | SchemeName::AntitheticMilstein
            if context.model.drivers.len() == 1 =>
        {
            "One driver: Milstein's scheme needs no iterated integrals beyond the increment."
        }
        SchemeName::Milstein | SchemeName::AntitheticMilstein => {
            "The noise commutes: Milstein's scheme needs only products of increments, less the correlation \
             times the step."
        }
        _ if choice.ruled => {
            "Euler-Maruyama, with the value kept at or folded back at the closed ends as declared; for \
             paths that meet an end no order is stated."
        }
        _ if choice.kink.is_some() => {
            "A coefficient has a kink, so that Milstein's derivatives do not exist everywhere: Euler-Maruyama."
        }
        _ if choice.clash.is_some() => {
            "The noise does not commute: Euler-Maruyama, whose weak order 1 needs no Levy areas. `milstein` as the scheme \
             asked for has them simulated, for strong order 1 at a cost of a step that grows like the root of one over \
             its length."
        }
        _ => "Euler-Maruyama.",
    };
    text.to_owned()
}

/// What happens at the ends of a state's domain.
fn ends(context: &Context<'_>, state: usize, method: &Method) -> Vec<String> {
    let declared = &context.model.states[state];
    let sides = [
        (
            "lower",
            declared.domain.lower,
            declared.at_lower,
            context.projections[state].lower,
        ),
        (
            "upper",
            declared.domain.upper,
            declared.at_upper,
            context.projections[state].upper,
        ),
    ];
    let mut found = Vec::new();
    for (side, bound, rule, projected) in sides {
        let Some(end) = bound.value() else { continue };
        let (name, end) = (&declared.name, context.model.pool.format(end));
        match rule {
            Some(AtEdge::Absorb | AtEdge::Reflect) if matches!(method, Method::RungeKutta4(_)) => {
                found.push(format!(
                    "{name} does not come to its {side} end {end}, so that nothing has to be done there; a step \
                     that leads beyond it is counted."
                ));
            }
            Some(AtEdge::Absorb) => found.push(format!(
                "A value of {name} at or beyond its {side} end {end} after a step is put there and stays; \
                 excursions within a step are not seen."
            )),
            Some(AtEdge::Reflect) => found.push(format!(
                "A value of {name} beyond its {side} end {end} is reflected there (symmetrised Euler)."
            )),
            Some(AtEdge::AsEquation) | None if projected.is_none() && !context.is_mapped(state) => {
                found.push(format!("A step may take {name} beyond its {side} end {end}; such paths are counted."));
            }
            _ => {}
        }
    }
    found
}

/// On what the orders rest.
fn regularity(context: &Context<'_>, choice: &Choice, method: &Method) -> Vec<String> {
    let Method::Step(steps) = method else {
        return Vec::new();
    };
    if choice.projected || choice.ruled {
        return Vec::new();
    }
    // States with an exact law are inputs here: the scheme makes no error in them.
    let coordinates = context
        .coordinates
        .iter()
        .filter(|c| context.is_member(c.state));
    let symbols: Vec<Symbol> = coordinates.map(|c| c.symbol).collect();
    let mut found = Vec::new();
    let mut lipschitz = true;
    for step in steps {
        let name = &context.model.states[step.state].name;
        let noise = step.diffusion.iter().map(|&b| ("noise", b));
        for (what, coefficient) in std::iter::once(("drift", step.drift)).chain(noise) {
            if what == "drift" && step.implicit.is_some() {
                found.push(format!(
                    "The drift of {name} is one-sided Lipschitz in its coordinate and the noise constant there."
                ));
                continue;
            }
            if what == "drift" && choice.tame && step.taming.is_some() {
                found.push(format!(
                    "The drift of {name} grows faster than linearly and pulls inwards, its noise is globally \
                     Lipschitz, as the theorem on tamed schemes assumes."
                ));
                continue;
            }
            let sentence = not_lipschitz(context, what, name, coefficient, &symbols);
            lipschitz &= sentence.is_none();
            found.extend(sentence);
        }
    }
    found.dedup();
    if steps.iter().all(|step| step.implicit.is_some()) {
        return found;
    }
    found.push(if lipschitz {
        "The coefficients are globally Lipschitz, as the theorems on these orders assume.".to_owned()
    } else {
        "The orders are those for globally Lipschitz coefficients, which is not given here: check the step \
         by halving it."
            .to_owned()
    });
    found
}

fn not_lipschitz(
    context: &Context<'_>,
    what: &str,
    name: &str,
    coefficient: Expr,
    symbols: &[Symbol],
) -> Option<String> {
    let pool = &context.model.pool;
    match growth(pool, coefficient, symbols) {
        Growth::Lipschitz => None,
        Growth::Superlinear { symbol, power } => Some(format!(
            "The {what} of {name} grows like |{}|^{power}: moments of explicit schemes may diverge \
             (Hutzenthaler, Jentzen and Kloeden 2011).",
            pool.symbol_name(symbol)
        )),
        Growth::NotShown { symbol } => Some(format!(
            "The {what} of {name} could not be shown to be globally Lipschitz in {}.",
            pool.symbol_name(symbol)
        )),
    }
}

/// What was considered and why it was not taken.
pub(super) fn rejected(
    context: &Context<'_>,
    choice: &Choice,
    scheme: SchemeName,
    states: &[usize],
) -> Vec<(SchemeName, String)> {
    let model = context.model;
    let mut found = Vec::new();
    for &i in states {
        if let Some(refusal) = &context.refusals[i] {
            found.push((
                SchemeName::Exact,
                format!("{}: {refusal}", model.states[i].name),
            ));
        }
    }
    if choice.deterministic && choice.ruled {
        let reason = "its slopes within a step do not see the end that absorbs or reflects";
        found.push((SchemeName::RungeKutta4, reason.to_owned()));
    }
    if choice.deterministic || matches!(scheme, SchemeName::Milstein | SchemeName::StrongTaylor15) {
        return found;
    }
    if scheme == SchemeName::DriftImplicitEuler {
        found.extend(explicit(context, states));
        return found;
    }
    if choice.tame && matches!(scheme, SchemeName::TamedEuler | SchemeName::TamedMilstein) {
        let reason = "the moments of explicit schemes may diverge where the drift grows faster than linearly \
                      (Hutzenthaler, Jentzen and Kloeden 2011)";
        let plain = match scheme {
            SchemeName::TamedMilstein => SchemeName::Milstein,
            _ => SchemeName::EulerMaruyama,
        };
        found.push((plain, reason.to_owned()));
    }
    let reason = if let Some((state, pair)) = &choice.clash {
        clash(model, *state, pair)
    } else if let Some(kink) = choice.kink {
        format!("a coefficient has a kink (`{}`)", kink.name())
    } else if choice.projected || choice.ruled {
        "its term needs derivatives of the noise up to the end of the domain, where they need not exist".to_owned()
    } else {
        return found;
    };
    found.push((SchemeName::Milstein, reason));
    found
}

/// The explicit schemes beside a drift-implicit one that was chosen.
fn explicit(context: &Context<'_>, states: &[usize]) -> Vec<(SchemeName, String)> {
    let chosen = |&&i: &&usize| matches!(&context.implicit[i], Some(Ok(found)) if found.chosen);
    let Some(&state) = states.iter().find(chosen) else {
        return Vec::new();
    };
    let name = &context.model.states[state].name;
    let beyond = format!("a step in {name} itself may lead beyond an end of its domain");
    let steep = "in the coordinate the drift grows faster than linearly: its moments may diverge (Hutzenthaler, Jentzen \
                 and Kloeden 2011)";
    let held = "it keeps the moments finite by slowing a steep drift down, which is an error that only small steps make small";
    vec![
        (SchemeName::EulerMaruyama, beyond.clone()),
        (SchemeName::Milstein, format!("{beyond}; {steep}")),
        (SchemeName::TamedMilstein, held.to_owned()),
    ]
}

/// Why Milstein's scheme needs more than increments.
pub(super) fn clash(model: &Model, state: usize, clash: &Clash) -> String {
    let (first, second) = (
        &model.drivers[clash.first].name,
        &model.drivers[clash.second].name,
    );
    let name = &model.states[state].name;
    if clash.certain {
        format!(
            "the noise of {name} does not commute: along {first} and {second} the iterated derivatives \
             differ by {}, so that Levy areas would be needed",
            model.pool.format(clash.difference)
        )
    } else {
        format!("it could not be proved that the noise of {name} commutes in {first} and {second}")
    }
}
