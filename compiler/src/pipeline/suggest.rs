//! What the author could write so that a state is stepped exactly, or never leaves its domain.
//!
//! A suggestion is an edit of the file: keys of a state's table to write or to leave out. It is made only after the
//! edited file has been read and planned, so that whoever pastes it gets what was promised.

use crate::analysis::free::{Freedom, free_of};
use crate::calculus::{Process, dynamics};
use crate::diagnostic::Diagnostics;
use crate::front;
use crate::model::{Model, SchemeName, State};
use crate::scheme::{Group, Plan, plan};
use crate::source::SourceFile;
use crate::symbolic::{Bound, Expr, Node, Pool};

use super::Compiled;
use super::edit::edited;

/// States for which something is sought; for more, reading and planning again takes too long.
const MAX_STATES: usize = 12;
/// Term operations of a model beyond which nothing is sought.
const MAX_OPERATIONS: u64 = 200_000;

/// An edit of a state's table and what it gives.
pub struct Suggestion {
    /// The state, by its index.
    pub state: usize,
    /// What to write.
    pub write: Vec<(&'static str, String)>,
    /// Which keys to leave out.
    pub leave_out: Vec<&'static str>,
    /// The model as it would be.
    pub model: Model,
    /// How it would be stepped.
    pub plan: Plan,
}

impl Suggestion {
    /// The group of the state in the new plan.
    pub fn group(&self) -> &Group {
        &self.plan.groups[self.plan.group_of(self.state)]
    }

    /// The coordinate of the state in the new plan, and its process, in the new model's states.
    pub fn coordinate(&self) -> (Expr, &Process) {
        let coordinate = &self.plan.coordinates[self.state];
        (coordinate.forward, &coordinate.process)
    }
}

/// The suggestions for a compiled file, at most one for each state.
pub fn suggestions(compiled: &Compiled) -> Vec<Suggestion> {
    let (model, plan) = (&compiled.model, &compiled.plan);
    if model.pool.operations() > MAX_OPERATIONS {
        return Vec::new();
    }
    let approximate = |&i: &usize| !plan.groups[plan.group_of(i)].is_exact();
    let states = (0..model.states.len()).filter(approximate);
    states
        .take(MAX_STATES)
        .filter_map(|state| {
            let seeker = Seeker { compiled, state };
            seeker.exact().or_else(|| seeker.inside())
        })
        .collect()
}

/// Looks for an edit of one state's table.
struct Seeker<'a> {
    compiled: &'a Compiled,
    state: usize,
}

/// An edit: what to write and what to leave out.
type Edit = (Vec<(&'static str, String)>, Vec<&'static str>);

impl Seeker<'_> {
    fn declared(&self) -> &State {
        &self.compiled.model.states[self.state]
    }

    /// An edit after which the state is stepped by its exact law.
    fn exact(&self) -> Option<Suggestion> {
        let found = self
            .freed()
            .into_iter()
            .chain(self.invariant())
            .chain(self.domains());
        let exact = found
            .filter_map(|edit| self.tried(edit))
            .find(|s| s.group().is_exact())?;
        Some(self.with_coordinate(exact))
    }

    /// An edit after which no step leaves the domain.
    fn inside(&self) -> Option<Suggestion> {
        let plan = &self.compiled.plan;
        if plan.groups[plan.group_of(self.state)].preserves_domain {
            return None;
        }
        let keeps = |s: &Suggestion| s.group().preserves_domain;
        let freed = self.freed().and_then(|edit| self.tried(edit)).filter(keeps);
        if let Some(freed) = freed {
            let text = freed.model.pool.format(freed.coordinate().0);
            let kept = self.tried((vec![("through", text)], Vec::new()));
            return Some(
                kept.filter(keeps)
                    .unwrap_or_else(|| self.with_coordinate(freed)),
            );
        }
        let noise = &self.compiled.dynamics.states[self.state].diffusion;
        if noise
            .iter()
            .all(|&b| self.compiled.model.pool.is_zero_literal(b))
        {
            return None;
        }
        let implicit = SchemeName::DriftImplicitEuler.to_string();
        self.tried((vec![("scheme", implicit)], vec!["through"]))
            .filter(keeps)
    }

    /// Without the scheme and the coordinate that the author asked for.
    fn freed(&self) -> Option<Edit> {
        let declared = self.declared();
        let keys = [
            ("scheme", declared.scheme.is_some()),
            ("through", declared.through.is_some()),
        ];
        let asked: Vec<_> = keys.into_iter().filter(|k| k.1).map(|k| k.0).collect();
        (!asked.is_empty()).then_some((Vec::new(), asked))
    }

    /// In the coordinate that is linear if any is: with noise b and drift a the drift of the coordinate of unit noise is
    /// `q = a/b - b'/2`; where `b q'` is a constant other than 0, q itself is an Ornstein-Uhlenbeck process, so that no
    /// integral is needed.
    fn invariant(&self) -> Option<Edit> {
        let (model, declared) = (&self.compiled.model, self.declared());
        let (pool, x) = (&model.pool, declared.symbol);
        let process = &self.compiled.dynamics.states[self.state];
        let mut noises = process
            .diffusion
            .iter()
            .filter(|b| !pool.is_zero_literal(**b));
        let (&b, None) = (noises.next()?, noises.next()) else {
            return None;
        };
        let half = pool.ratio(1, 2);
        let correction = pool.mul(half, pool.derivative(b, x));
        let q = pool.expand(pool.simplify(pool.sub(pool.div(process.drift, b), correction)));
        let slope = pool.mul(b, pool.derivative(q, x));
        let states: Vec<_> = model.states.iter().map(|s| s.symbol).collect();
        let Freedom::Free(rate) = free_of(pool, slope, &states) else {
            return None;
        };
        if !pool.is_zero(rate).is_no() {
            return None;
        }
        let plain = moving_part(pool, q, x)?;
        let keys = self.freed().map_or(Vec::new(), |edit| edit.1);
        Some((vec![("through", pool.format(plain))], keys))
    }

    /// On a domain with the ends at which noise and drift vanish.
    fn domains(&self) -> Vec<Edit> {
        let pool = &self.compiled.model.pool;
        let declared = self.declared();
        let process = &self.compiled.dynamics.states[self.state];
        let rests = |n: i64| {
            let there = [(declared.symbol, pool.int(n))].into_iter().collect();
            let coefficients = process.diffusion.iter().chain([&process.drift]);
            coefficients
                .into_iter()
                .all(|&e| pool.is_zero(pool.substitute(e, &there)).is_yes())
        };
        let zero = |bound: Bound| bound.value().is_none_or(|e| pool.is_zero(e).is_yes());
        let open = matches!(declared.domain.lower, Bound::Open(_));
        if open || !zero(declared.domain.lower) || !rests(0) {
            return Vec::new();
        }
        let mut found = Vec::new();
        if declared.domain.upper == Bound::Infinite {
            found.push("(0, inf)");
        }
        if rests(1) {
            found.insert(0, "(0, 1)");
        }
        let edit = |domain: &str| {
            let mut keys = vec!["at_edge"];
            keys.extend(self.freed().into_iter().flat_map(|edit| edit.1));
            (vec![("domain", domain.to_owned())], keys)
        };
        found.into_iter().map(edit).collect()
    }

    /// The suggestion with the coordinate that the planner found written out, if the plan stays the same with it.
    fn with_coordinate(&self, found: Suggestion) -> Suggestion {
        let identity = found.plan.coordinates[self.state].identity;
        if identity || found.write.iter().any(|(key, _)| *key == "through") {
            return found;
        }
        let mut write = found.write.clone();
        write.push(("through", found.model.pool.format(found.coordinate().0)));
        let leave_out = found.leave_out.iter().copied();
        let leave_out = leave_out.filter(|key| *key != "through").collect();
        let same = |s: &Suggestion| {
            let (new, old) = (s.group(), found.group());
            (new.kind, new.law, new.preserves_domain) == (old.kind, old.law, old.preserves_domain)
        };
        self.tried((write, leave_out)).filter(same).unwrap_or(found)
    }

    /// The file with an edit, read and planned; none where that is in error.
    fn tried(&self, (write, leave_out): Edit) -> Option<Suggestion> {
        let source = &self.compiled.model.source;
        let text = edited(source.text(), &self.declared().name, &write, &leave_out)?;
        let mut diagnostics = Diagnostics::new();
        let source = SourceFile::new(source.path(), text);
        let model = front::read(&source, &mut diagnostics)?;
        let plan = plan(&model, &dynamics(&model), &mut diagnostics);
        if diagnostics.finish().iter().any(|d| d.is_error()) {
            return None;
        }
        let present = |key: &&str| match *key {
            "scheme" => self.declared().scheme.is_some(),
            "through" => self.declared().through.is_some(),
            _ => self
                .declared()
                .at_lower
                .or(self.declared().at_upper)
                .is_some(),
        };
        let leave_out = leave_out
            .into_iter()
            .filter(|key| present(key) && write.iter().all(|(k, _)| k != key))
            .collect();
        Some(Suggestion {
            state: self.state,
            write,
            leave_out,
            model,
            plan,
        })
    }
}

/// The part of a sum that depends on a symbol, without a factor that does not.
fn moving_part(pool: &Pool, e: Expr, x: crate::symbolic::Symbol) -> Option<Expr> {
    let parts = |e: Expr| match &*pool.node(e) {
        Node::Sum(terms) => terms.to_vec(),
        _ => vec![e],
    };
    let moving = parts(e).into_iter().filter(|&t| pool.depends_on(t, x));
    let collected = pool.simplify(pool.sum(moving.collect::<Vec<_>>()));
    match &*pool.node(collected) {
        Node::Product(factors) => {
            let moving = factors.iter().copied().filter(|&f| pool.depends_on(f, x));
            Some(pool.product(moving.collect::<Vec<_>>()))
        }
        _ => pool.depends_on(collected, x).then_some(collected),
    }
}
