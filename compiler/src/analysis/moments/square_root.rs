//! The square-root process and its noncentral chi-square law (Feller 1951; Cox, Ingersoll and Ross
//! 1985, section 3).

use super::affine::affine;
use super::edges::{Edge, edge};
use super::{LawName, Moments};
use crate::calculus::{System, bracket};
use crate::symbolic::{Bound, Expr, Node};

impl Moments {
    /// The law of a formula at one time, where it is known.
    pub fn law(&self, formula: Expr) -> Option<LawName> {
        if let Some(law) = self.normal_law(formula) {
            return Some(law.name);
        }
        self.is_square_root(formula)
            .then_some(LawName::NoncentralChiSquare)
    }

    /// Whether the formula is a state `dX = (a0 + a1 X) dt + s sqrt(X) dW` on the half line from 0 with
    /// `a0 > 0`, driven by nothing else.
    fn is_square_root(&self, formula: Expr) -> bool {
        let pool = &self.model.pool;
        let Node::Symbol(symbol) = *pool.node(formula) else {
            return false;
        };
        let Some(state) = self.model.state_of(symbol) else {
            return false;
        };
        let system = System::of(&self.model, &self.dynamics);
        let process = &self.dynamics.states[state];
        let rate = bracket(&self.model, &process.diffusion, &process.diffusion);
        let domain = self.model.states[state].domain;
        let from_zero = domain
            .lower
            .value()
            .is_some_and(|e| pool.is_zero(e).is_yes());
        if system.closure([formula]) != [state]
            || !from_zero
            || domain.upper != Bound::Infinite
            || edge(&self.model, &self.dynamics, state) > Edge::KeptInside
        {
            return false;
        }
        let (Some(drift), Some(rate)) = (
            affine(pool, process.drift, &[symbol]),
            affine(pool, rate, &[symbol]),
        ) else {
            return false;
        };
        let fixed = |e: Expr| !pool.depends_on(e, self.model.time);
        let positive = |e: Expr| pool.sign(pool.simplify(e)).is_positive();
        [drift.constant, drift.slopes[0], rate.slopes[0]]
            .into_iter()
            .all(fixed)
            && positive(drift.constant)
            && pool.is_zero(rate.constant).is_yes()
            && positive(rate.slopes[0])
    }
}
