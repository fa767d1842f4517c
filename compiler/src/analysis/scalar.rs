//! Scalar diffusions: what the searches for laws that are not Gaussian ask of one state.

use super::dependence::mentioned;
use super::free::{Freedom, free_of};
use super::limits::{Limit, limit};
use crate::calculus::{Dynamics, covariation};
use crate::model::{Model, State};
use crate::symbolic::{Bound, Expr};

/// Formulas larger than this are not searched: their derivatives would take too long.
pub(super) const LARGEST: usize = 400;

/// What a search for a law of one state found.
#[derive(Clone, Debug)]
pub enum Finding<L> {
    /// Its law.
    Law(Box<L>),
    /// It has a law of the kind in a coordinate, but is not to be stepped by it; why.
    Refused(String),
    /// No coordinate was found in which it has.
    Other,
}

impl<L> Finding<L> {
    /// The law, if there is one.
    pub fn law(self) -> Option<Box<L>> {
        match self {
            Self::Law(law) => Some(law),
            Self::Refused(_) | Self::Other => None,
        }
    }
}

/// A state whose coefficients hold nothing but itself, parameters and perhaps time.
pub(super) struct Scalar<'a> {
    pub(super) model: &'a Model,
    pub(super) state: usize,
    pub(super) drift: Expr,
    /// The square of the noise per unit of time.
    pub(super) square: Expr,
}

impl<'a> Scalar<'a> {
    /// A state whose coefficients do not depend on time.
    pub(super) fn read(model: &'a Model, dynamics: &Dynamics, state: usize) -> Option<Self> {
        Self::read_moving(model, dynamics, state).filter(|scalar| !scalar.is_moving())
    }

    /// A state whose coefficients may depend on time.
    pub(super) fn read_moving(model: &'a Model, dynamics: &Dynamics, state: usize) -> Option<Self> {
        let pool = &model.pool;
        let drift = pool.simplify(dynamics.states[state].drift);
        let square = pool.simplify(covariation(model, &dynamics.states, state, state));
        let own = |e: Expr| {
            mentioned(model, e).iter().all(|&j| j == state)
                && pool.has_kink(e).is_none()
                && pool.size(e) <= LARGEST
        };
        let noisy = !pool.is_zero_literal(square);
        (noisy && own(drift) && own(square)).then_some(Self {
            model,
            state,
            drift,
            square,
        })
    }

    /// Whether a coefficient depends on time.
    pub(super) fn is_moving(&self) -> bool {
        self.moves(self.drift) || self.moves(self.square)
    }

    /// Whether a formula depends on time.
    pub(super) fn moves(&self, e: Expr) -> bool {
        self.model.pool.depends_on(e, self.model.time)
    }

    /// The state's declaration.
    pub(super) fn declared(&self) -> &'a State {
        &self.model.states[self.state]
    }

    /// A formula that is free of the state.
    pub(super) fn constant(&self, e: Expr) -> Option<Expr> {
        match free_of(&self.model.pool, e, &[self.declared().symbol]) {
            Freedom::Free(value) => Some(value),
            Freedom::DependsOn(_) | Freedom::CannotTell(_) => None,
        }
    }

    /// The derivative in the state.
    pub(super) fn along(&self, e: Expr) -> Expr {
        self.model.pool.derivative(e, self.declared().symbol)
    }

    /// A formula's limits at the lower and the upper end of the state's domain.
    pub(super) fn ends(&self, formula: Expr) -> [Limit; 2] {
        let declared = self.declared();
        let at = |bound: Bound, infinite: Limit| {
            let place = bound.value().map_or(infinite, Limit::Value);
            limit(&self.model.pool, formula, declared.symbol, place)
        };
        [
            at(declared.domain.lower, Limit::MinusInfinity),
            at(declared.domain.upper, Limit::PlusInfinity),
        ]
    }

    /// Whether a coordinate maps the domain onto the half line from 0, and one to one.
    pub(super) fn onto_half_line(&self, forward: Expr) -> bool {
        let ends = match self.ends(forward) {
            [lower, upper] if self.is_zero(lower) => upper.is_infinite(),
            [lower, upper] if self.is_zero(upper) => lower.is_infinite(),
            _ => false,
        };
        ends && self.is_monotone(forward)
    }

    /// Whether a coordinate maps the domain onto the whole line, and one to one.
    pub(super) fn onto_line(&self, forward: Expr) -> bool {
        self.ends(forward).into_iter().all(Limit::is_infinite) && self.is_monotone(forward)
    }

    /// Whether a limit is 0.
    pub(super) fn is_zero(&self, limit: Limit) -> bool {
        matches!(limit, Limit::Value(v) if self.model.pool.is_zero(v).is_yes())
    }

    fn is_monotone(&self, forward: Expr) -> bool {
        let pool = &self.model.pool;
        let slope = pool.sign(pool.simplify(self.along(forward)));
        slope.is_non_negative() || slope.is_non_positive()
    }

    /// Why the author's `through` asks for something else; none where it is an affine function of the coordinate.
    pub(super) fn other_coordinate(&self, coordinate: Expr, what: &str) -> Option<String> {
        let pool = &self.model.pool;
        let asked = self.declared().through.as_ref()?;
        let ratio = pool.div(self.along(asked.expr), self.along(coordinate));
        if self.constant(ratio).is_some() {
            return None;
        }
        Some(format!(
            "{} is {what} and would be stepped exactly without `through`: its law is drawn in that coordinate, \
             not in `{}`",
            pool.format(coordinate),
            asked.text
        ))
    }
}

/// The other states that have a driver which is one of a state's drivers or correlated with one: a draw from a law that is
/// not Gaussian gives no increments of drivers.
pub fn entangled(model: &Model, dynamics: &Dynamics, state: usize) -> Vec<usize> {
    let pool = &model.pool;
    let drivers = |i: usize| {
        let noise = &dynamics.states[i].diffusion;
        (0..noise.len()).filter(|&j| !pool.is_zero_literal(noise[j]))
    };
    let meet = |other: usize| {
        drivers(state)
            .any(|j| drivers(other).any(|k| !pool.is_zero_literal(model.correlation[j][k])))
    };
    (0..model.states.len())
        .filter(|&i| i != state && meet(i))
        .collect()
}
