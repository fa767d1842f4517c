//! Systems of coordinates in which moment equations are tried: the states as declared, and states
//! replaced by functions of them that make the equations close, such as the logarithm of a price.

use std::collections::{BTreeMap, BTreeSet};

use super::edges::{Edge, edge};
use super::integrability::ends_hold;
use crate::analysis::coordinate::{Candidate, through};
use crate::calculus::{Dynamics, Process, System};
use crate::model::Model;
use crate::symbolic::{Expr, Function, Node, Sign, Symbol, SymbolKind};

/// A coordinate that may stand for a state: `u = forward(x)`, `x = inverse(u)`.
#[derive(Clone, Debug)]
pub(super) struct Change {
    /// The state, by its index in the model.
    pub(super) state: usize,
    /// The coordinate's symbol.
    pub(super) symbol: Symbol,
    /// u in the state.
    pub(super) forward: Expr,
    /// The state in u.
    pub(super) inverse: Expr,
}

impl Change {
    /// The author's coordinate of a state, where it can be inverted.
    pub(super) fn through(model: &Model, state: usize) -> Option<Self> {
        let Candidate {
            symbol,
            forward,
            inverse,
            ..
        } = through(model, &model.states[state])?;
        (forward != inverse).then_some(Self {
            state,
            symbol,
            forward,
            inverse,
        })
    }
}

/// A system with the values of its coordinates at time 0, and how states are expressed in it.
pub(super) struct Chart<'a> {
    pub(super) system: System<'a>,
    pub(super) start: BTreeMap<Symbol, Expr>,
    /// States that were replaced, in their coordinates.
    pub(super) inverse: BTreeMap<Symbol, Expr>,
    changed: BTreeSet<usize>,
}

impl<'a> Chart<'a> {
    /// The states with some of them replaced.
    pub(super) fn new(model: &'a Model, states: &'a [Process], changes: &[Change]) -> Self {
        let pool = &model.pool;
        let mut system = System::of_states(model, states);
        let raw = system.clone();
        let initial: BTreeMap<Symbol, Expr> = std::iter::once((model.time, pool.zero()))
            .chain(model.states.iter().map(|s| (s.symbol, s.initial.expr)))
            .collect();
        let mut start = initial.clone();
        let mut inverse = BTreeMap::new();
        for change in changes {
            let expansion = raw.expand(change.forward);
            system.symbols[change.state] = change.symbol;
            system.processes.to_mut()[change.state] = expansion.process();
            start.insert(change.symbol, pool.substitute(change.forward, &initial));
            inverse.insert(model.states[change.state].symbol, change.inverse);
        }
        let changed: BTreeSet<usize> = changes.iter().map(|c| c.state).collect();
        let mut chart = Self {
            system,
            start,
            inverse,
            changed,
        };
        chart.rewrite_processes();
        chart
    }

    /// Puts the replaced states into the coefficients that name them.
    fn rewrite_processes(&mut self) {
        if self.inverse.is_empty() {
            return;
        }
        let pool = self.system.pool();
        let rewrite = |e: Expr| {
            let inside = pool.substitute(e, &self.inverse);
            if inside == e {
                e
            } else {
                pool.simplify(inside)
            }
        };
        let rewritten = self.system.processes.iter().map(|process| Process {
            drift: rewrite(process.drift),
            diffusion: process.diffusion.iter().map(|&b| rewrite(b)).collect(),
        });
        self.system.processes = rewritten.collect();
    }

    /// A formula in the states, in the coordinates.
    pub(super) fn express(&self, formula: Expr) -> Expr {
        let pool = self.system.pool();
        let inside = pool.substitute(formula, &self.inverse);
        if inside == formula {
            formula
        } else {
            pool.simplify(inside)
        }
    }

    /// Whether means of a formula may be taken as far as the ends of the domains are concerned. A
    /// replaced state must not reach an end at all: its coordinate may have no value there.
    pub(super) fn ends_hold(&self, dynamics: &Dynamics, formula: Expr) -> bool {
        let model = self.system.model;
        let closure = self.system.closure([formula]);
        ends_hold(model, dynamics, &closure)
            && closure
                .iter()
                .filter(|i| self.changed.contains(i))
                .all(|&i| edge(model, dynamics, i) == Edge::NeverReached)
    }
}

/// `log(x)` as the coordinate of every state that stands alone under a logarithm in the formula.
pub(super) fn logarithms(model: &Model, formula: Expr) -> Vec<Change> {
    let pool = &model.pool;
    changes(model, formula, "log", |part| match &*pool.node(part) {
        Node::Call(Function::Log, arguments) => Some((arguments[0], part)),
        _ => None,
    })
    .map(|(state, symbol, forward)| Change {
        state,
        symbol,
        forward,
        inverse: pool.exp(pool.var(symbol)),
    })
    .collect()
}

/// `1/x` as the coordinate of every state that has a negative power in the formula: equations such as
/// the logistic one are linear in the reciprocal (Kloeden and Platen 1992, section 4.4, from memory).
pub(super) fn reciprocals(model: &Model, formula: Expr) -> Vec<Change> {
    let pool = &model.pool;
    let reciprocal = |e: Expr| pool.div(pool.one(), e);
    changes(model, formula, "1/", |part| match &*pool.node(part) {
        Node::Power(base, exponent) if pool.sign(*exponent) == Sign::Negative => {
            Some((*base, reciprocal(*base)))
        }
        _ => None,
    })
    .map(|(state, symbol, forward)| Change {
        state,
        symbol,
        forward,
        inverse: reciprocal(pool.var(symbol)),
    })
    .collect()
}

/// The states that stand alone inside a part of the formula which `read` takes apart into what stands
/// there and the coordinate; each with the coordinate's symbol and formula.
fn changes(
    model: &Model,
    formula: Expr,
    name: &str,
    read: impl Fn(Expr) -> Option<(Expr, Expr)>,
) -> impl Iterator<Item = (usize, Symbol, Expr)> {
    let pool = &model.pool;
    let mut found = BTreeMap::new();
    for part in pool.postorder(formula) {
        let Some((inside, forward)) = read(part) else {
            continue;
        };
        let Node::Symbol(symbol) = &*pool.node(inside) else {
            continue;
        };
        if let Some(state) = model.state_of(*symbol) {
            let name = format!("{name}[{}]", pool.symbol_name(*symbol));
            found.insert(state, (pool.symbol(&name, SymbolKind::Auxiliary), forward));
        }
    }
    found
        .into_iter()
        .map(|(state, (symbol, forward))| (state, symbol, forward))
}
