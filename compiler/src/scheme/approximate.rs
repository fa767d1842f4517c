//! Groups stepped by a scheme with a discretisation error: which scheme, and why.

use std::collections::{BTreeMap, BTreeSet};
use std::rc::Rc;

use super::edges::{self, Projection};
use super::step::{Frame, size, state_step};
use super::{
    Coordinate, Group, Kind, Law, Method, Order, SchemeName, StateStep, implicit, overrides,
    reasons,
};
use crate::analysis::asymptotics::Side;
use crate::analysis::commute::{Clash, clash};
use crate::analysis::coordinate::through;
use crate::analysis::dependence::{mentioned, sources};
use crate::analysis::end_rules::{acting, ruled};
use crate::analysis::free::kink_in;
use crate::analysis::growth::{Growth, growth, pulls_inward};
use crate::calculus::Dynamics;
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Bound, Expr, Function, Symbol};

/// What the choice among approximate schemes rests on.
pub(super) struct Context<'a> {
    pub(super) model: &'a Model,
    pub(super) dynamics: &'a Dynamics,
    pub(super) coordinates: &'a [Coordinate],
    /// Per state, the ends its coefficients are projected to.
    pub(super) projections: &'a [Projection],
    /// Per state, Ito's rule on its coordinate.
    pub(super) traces: &'a [Trace],
    /// Per state, whether nothing random reaches it.
    pub(super) calm: Vec<bool>,
    /// Per state, why it has no exact law; none where it has one.
    pub(super) refusals: Vec<Option<String>>,
    /// Per state, whether a law of its own is drawn that is not Gaussian: it uses up its drivers.
    pub(super) own_law: Vec<bool>,
    /// Per state, whether a square-root process carries it.
    pub(super) carried: Vec<bool>,
    /// Per state, where the drift-implicit scheme was asked for, its coordinate or why it does not fit.
    pub(super) implicit: Vec<Option<Result<implicit::Found, String>>>,
}

/// What is known of a component of approximate states, and what follows.
pub(super) struct Choice {
    /// The scheme for states without an override.
    pub(super) scheme: SchemeName,
    /// Nothing random reaches the component.
    pub(super) deterministic: bool,
    /// Every coefficient of the noise is free of the states.
    pub(super) additive: bool,
    /// The first state whose noise does not commute, with the pair of drivers.
    pub(super) clash: Option<(usize, Clash)>,
    /// A function with a kink in a coefficient.
    pub(super) kink: Option<Function>,
    /// A state that is projected to its domain.
    pub(super) projected: bool,
    /// A state that is absorbed or reflected, as far as that may happen.
    pub(super) ruled: bool,
    /// A drift grows faster than linearly, always inwards, and the noise is globally Lipschitz: what the
    /// tamed schemes are for.
    pub(super) tame: bool,
    /// A state is read whose scheme has no known order.
    pub(super) fed: bool,
    /// The strong order of the drift-implicit steps of the component; one where there are none.
    pub(super) implicit: Option<Order>,
    /// The noise is additive or has one driver, and nothing is read whose own law is drawn exactly.
    pub(super) taylor: bool,
}

impl Choice {
    /// Whether the component follows ordinary differential equations, and no rule of an end acts on it.
    pub(super) fn is_flow(&self) -> bool {
        self.deterministic && !self.ruled
    }
}

impl Context<'_> {
    /// The groups of all states without an exact row, each component split by scheme.
    pub(super) fn groups(&self, choices: &BTreeMap<usize, Rc<Choice>>) -> Vec<Group> {
        let frame = Frame::new(self.model, self.coordinates);
        let mut groups = Vec::new();
        for component in self.components() {
            let choice = &choices[&component[0]];
            let mut by_scheme: BTreeMap<SchemeName, Vec<usize>> = BTreeMap::new();
            for &state in &component {
                let scheme = self.scheme(state, choice);
                by_scheme.entry(scheme).or_default().push(state);
            }
            let company: Vec<SchemeName> = by_scheme.keys().copied().collect();
            for (scheme, states) in by_scheme {
                groups.push(self.group(&frame, choice, scheme, &company, states));
            }
        }
        groups
    }

    fn scheme(&self, state: usize, choice: &Choice) -> SchemeName {
        let chosen = matches!(&self.implicit[state], Some(Ok(found)) if found.chosen);
        let own = chosen && choice.kink.is_none();
        overrides::honoured(self, state, choice).unwrap_or(match own {
            true => SchemeName::DriftImplicitEuler,
            false => choice.scheme,
        })
    }

    /// The choice for the component of each approximate state.
    pub(super) fn choices(&self) -> BTreeMap<usize, Rc<Choice>> {
        let mut found = BTreeMap::new();
        for component in self.components() {
            let choice = Rc::new(self.choose(&component));
            found.extend(component.into_iter().map(|i| (i, Rc::clone(&choice))));
        }
        found
    }

    /// Whether a state's coordinate takes every number into its domain.
    pub(super) fn is_mapped(&self, state: usize) -> bool {
        if let Some(Ok(_)) = &self.implicit[state] {
            return true;
        }
        let declared = &self.model.states[state];
        match &declared.through {
            Some(_) => {
                through(self.model, declared).is_some_and(|c| c.onto_line && !c.is_identity())
            }
            None => self.is_freed(state),
        }
    }

    /// Whether a state is stepped in a coordinate that was chosen to keep it in its domain.
    pub(super) fn is_freed(&self, state: usize) -> bool {
        let declared = &self.model.states[state];
        declared.through.is_none()
            && self.implicit[state].is_none()
            && self.projections[state].is_none()
            && !self.coordinates[state].identity
    }

    /// Whether a state is stepped by one of the schemes here.
    pub(super) fn is_member(&self, state: usize) -> bool {
        self.refusals[state].is_some() && !self.carried[state]
    }

    /// Approximate states connected through their coefficients.
    fn components(&self) -> Vec<Vec<usize>> {
        let count = self.model.states.len();
        let mut label: Vec<usize> = (0..count).collect();
        for i in (0..count).filter(|&i| self.is_member(i)) {
            for j in sources(self.model, self.dynamics, i) {
                if self.is_member(j) && label[i] != label[j] {
                    let (keep, drop) = (label[i].min(label[j]), label[i].max(label[j]));
                    label
                        .iter_mut()
                        .filter(|l| **l == drop)
                        .for_each(|l| *l = keep);
                }
            }
        }
        let mut found: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
        for i in (0..count).filter(|&i| self.is_member(i)) {
            found.entry(label[i]).or_default().push(i);
        }
        found.into_values().collect()
    }

    pub(super) fn choose(&self, component: &[usize]) -> Choice {
        let clash = component.iter().find_map(|&i| {
            Some((
                i,
                clash(
                    self.model,
                    self.dynamics,
                    &self.coordinates[i].process.diffusion,
                )?,
            ))
        });
        let mut choice = Choice {
            scheme: SchemeName::Milstein,
            deterministic: component.iter().all(|&i| self.calm[i]),
            additive: component
                .iter()
                .all(|&i| self.noise(i).all(|b| !self.mentions_states(b))),
            clash,
            kink: component.iter().find_map(|&i| self.kink(i)),
            projected: component.iter().any(|&i| !self.projections[i].is_none()),
            ruled: component.iter().any(|&i| self.is_ruled(i)),
            tame: self.is_tame(component),
            fed: self.read_by(component).iter().any(|&i| self.carried[i]),
            implicit: self.implicit_order(component),
            taylor: self.has_taylor(component),
        };
        choice.scheme = if choice.is_flow() {
            SchemeName::RungeKutta4
        } else if choice.projected {
            SchemeName::FullTruncationEuler
        } else if choice.ruled || choice.kink.is_some() {
            SchemeName::EulerMaruyama
        } else {
            match (choice.clash.is_some(), choice.tame) {
                (true, true) => SchemeName::TamedEuler,
                (false, true) => SchemeName::TamedMilstein,
                (true, false) => SchemeName::EulerMaruyama,
                (false, false) if choice.additive && choice.taylor => SchemeName::StrongTaylor15,
                (false, false) => SchemeName::Milstein,
            }
        };
        choice
    }

    /// Whether a drift of the component grows faster than linearly, each that does pulls inwards, and
    /// all of its noise is globally Lipschitz.
    fn is_tame(&self, component: &[usize]) -> bool {
        let pool = &self.model.pool;
        let frame = Frame::new(self.model, self.coordinates);
        let symbols: Vec<Symbol> = component
            .iter()
            .map(|&i| self.coordinates[i].symbol)
            .collect();
        let noises = component.iter().flat_map(|&i| self.noise(i));
        let lipschitz = |b: Expr| growth(pool, frame.write(b), &symbols) == Growth::Lipschitz;
        let mut steep = component.iter().filter_map(|&i| {
            let drift = frame.write(self.coordinates[i].process.drift);
            match growth(pool, drift, &symbols) {
                Growth::Superlinear { symbol, .. } => {
                    Some(symbol == self.coordinates[i].symbol && pulls_inward(pool, drift, symbol))
                }
                _ => None,
            }
        });
        let first = steep.next();
        first == Some(true) && steep.all(|inward| inward) && noises.into_iter().all(lipschitz)
    }

    fn implicit_order(&self, component: &[usize]) -> Option<Order> {
        let mut found = component.iter().filter_map(|&i| match &self.implicit[i] {
            Some(Ok(found)) => Some(found.order),
            _ => None,
        });
        let lesser = |a: Order, b: Order| if a.value() < b.value() { a } else { b };
        found.try_fold(Order::ONE, |all, one| Some(lesser(all, one?)))
    }

    /// Whether the strong Taylor scheme of order 1.5 needs no integrals beyond those of single drivers.
    fn has_taylor(&self, component: &[usize]) -> bool {
        let pool = &self.model.pool;
        let mut read = self.read_by(component);
        read.extend(component.iter().copied());
        let noises = read.iter().map(|&i| &self.dynamics.states[i].diffusion);
        let drivers: BTreeSet<usize> = noises
            .flat_map(|row| row.iter().enumerate())
            .filter(|(_, b)| !pool.is_zero_literal(**b))
            .map(|(j, _)| j)
            .collect();
        let additive = component
            .iter()
            .all(|&i| self.noise(i).all(|b| !self.mentions_states(b)));
        (additive || drivers.len() == 1) && read.iter().all(|&i| self.is_member(i))
    }

    /// The states that the coefficients of a component mention.
    fn read_by(&self, component: &[usize]) -> BTreeSet<usize> {
        let coefficients = component.iter().flat_map(|&i| {
            let process = &self.coordinates[i].process;
            process.diffusion.iter().copied().chain([process.drift])
        });
        coefficients
            .flat_map(|e| mentioned(self.model, e))
            .collect()
    }

    fn noise(&self, state: usize) -> impl Iterator<Item = Expr> + '_ {
        self.coordinates[state].process.diffusion.iter().copied()
    }

    fn mentions_states(&self, e: Expr) -> bool {
        !mentioned(self.model, e).is_empty()
    }

    fn kink(&self, state: usize) -> Option<Function> {
        let process = &self.coordinates[state].process;
        let states: Vec<Symbol> = self.model.states.iter().map(|s| s.symbol).collect();
        let mut coefficients = process.diffusion.iter().copied().chain([process.drift]);
        coefficients.find_map(|e| kink_in(&self.model.pool, e, &states))
    }

    fn is_ruled(&self, state: usize) -> bool {
        if self.calm[state] {
            acting(self.model, self.dynamics, state).is_some()
        } else {
            ruled(self.model, state).next().is_some()
        }
    }

    fn group(
        &self,
        frame: &Frame<'_>,
        choice: &Choice,
        scheme: SchemeName,
        company: &[SchemeName],
        states: Vec<usize>,
    ) -> Group {
        let (strong_order, weak_order) = orders(choice, scheme, company);
        let step = |&i: &usize| {
            state_step(
                self.model,
                self.dynamics,
                &self.coordinates[i],
                frame,
                scheme,
            )
        };
        let method = match scheme {
            SchemeName::RungeKutta4 => Method::RungeKutta4(
                states
                    .iter()
                    .map(|&i| (i, frame.write(self.coordinates[i].process.drift)))
                    .collect(),
            ),
            _ => {
                let mut steps: Vec<StateStep> = states.iter().map(step).collect();
                if matches!(scheme, SchemeName::TamedEuler | SchemeName::TamedMilstein) {
                    let size = size(self.model, &steps);
                    steps.iter_mut().for_each(|s| s.taming = Some(size));
                }
                Method::Step(steps)
            }
        };
        let mut trace = Trace::default();
        for &i in &states {
            trace.steps.extend(self.traces[i].steps.iter().cloned());
        }
        self.log_steps(&method, &mut trace);
        Group {
            kind: Kind::Approximate,
            law: choice.deterministic.then_some(Law::Deterministic),
            becomes: None,
            scheme,
            strong_order,
            weak_order,
            preserves_domain: states.iter().all(|&i| self.preserves_domain(i, &method)),
            reasons: reasons::why(self, choice, scheme, &states, &method),
            rejected: reasons::rejected(self, choice, scheme, &states),
            trace,
            method,
            states,
        }
    }

    fn log_steps(&self, method: &Method, trace: &mut Trace) {
        let Method::Step(steps) = method else { return };
        let drivers = &self.model.drivers;
        for step in steps {
            let name = &self.model.states[step.state].name;
            for &(j, k, coefficient) in &step.milstein {
                let (first, second) = (&drivers[j].name, &drivers[k].name);
                let note = format!(
                    "coefficient of d{first} d{second} less its mean over the step, in the coordinate of {name}"
                );
                trace.push("Milstein term", note, None, coefficient);
            }
            for &(j, k, coefficient) in &step.areas {
                let (first, second) = (&drivers[j].name, &drivers[k].name);
                let note = format!(
                    "coefficient of the Levy area of {first} and {second}, in the coordinate of {name}"
                );
                trace.push("Levy area term", note, None, coefficient);
            }
        }
    }

    /// Whether every step stays in the domain: the whole line, a coordinate whose inverse takes every
    /// number into the domain, a projection, or a rule at each finite end.
    fn preserves_domain(&self, state: usize, method: &Method) -> bool {
        let domain = self.model.states[state].domain;
        let projection = self.projections[state];
        let stepped = matches!(method, Method::Step(_));
        let forward = self.coordinates[state].forward;
        let ruled = |side| stepped && edges::rule(self.model, state, forward, side).is_some();
        let held = |bound: Bound, side, projected: bool| {
            let closed = matches!(bound, Bound::Closed(_));
            bound == Bound::Infinite || (closed && (projected || ruled(side)))
        };
        let lower = held(domain.lower, Side::Lower, projection.lower.is_some());
        let upper = held(domain.upper, Side::Upper, projection.upper.is_some());
        (lower && upper) || self.is_mapped(state)
    }
}

/// Strong and weak order; none where no rate is known. `company`: the schemes by which the states of the
/// component are stepped; each inherits the errors of the others.
fn orders(
    choice: &Choice,
    scheme: SchemeName,
    company: &[SchemeName],
) -> (Option<Order>, Option<Order>) {
    if choice.projected || choice.ruled || choice.fed {
        return (None, None);
    }
    if choice.deterministic {
        let order = match (scheme, choice.kink) {
            (SchemeName::RungeKutta4, None) => Order::FOUR,
            _ => Order::ONE,
        };
        return (Some(order), Some(order));
    }
    let all = |allowed: &[SchemeName]| company.iter().all(|s| allowed.contains(s));
    let weak = match scheme {
        _ if choice.kink.is_some() => None,
        _ if all(&[SchemeName::StrongTaylor15]) => Some(Order::TWO),
        _ => Some(Order::ONE),
    };
    let milstein = [
        SchemeName::Milstein,
        SchemeName::TamedMilstein,
        SchemeName::StrongTaylor15,
        SchemeName::AntitheticMilstein,
    ];
    // The last of them leaves the areas out.
    let milstein = match choice.clash {
        Some(_) => &milstein[..3],
        None => &milstein[..],
    };
    let implicit = company.contains(&SchemeName::DriftImplicitEuler);
    let strong = match scheme {
        _ if implicit && choice.implicit != Some(Order::ONE) => return (choice.implicit, weak),
        _ if choice.kink.is_some() => Order::HALF,
        _ if all(&[SchemeName::StrongTaylor15]) => Order::THREE_HALVES,
        _ if all(milstein) => Order::ONE,
        _ if choice.additive => Order::ONE,
        _ => Order::HALF,
    };
    (Some(strong), weak)
}
