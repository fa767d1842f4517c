//! When the stochastic integral in Ito's rule is a true martingale, so that means may be taken.

use super::edges::{Edge, edge};
use super::growth;
use crate::calculus::{Dynamics, Expansion, System};
use crate::model::Model;
use crate::symbolic::{Expr, Pool};

/// Whether moments may be taken through the ends of the domains of the given states: every finite end
/// is out of reach, or the coefficients keep the process inside.
pub(super) fn ends_hold(model: &Model, dynamics: &Dynamics, which: &[usize]) -> bool {
    which
        .iter()
        .all(|&i| edge(model, dynamics, i) <= Edge::KeptInside)
}

/// A reason why the stochastic integral in Ito's rule for a formula is a true martingale on every
/// finite horizon; none where none was found.
///
/// The ends of the domains are not looked at here.
pub(super) fn martingale_part(system: &System<'_>, formula: Expr) -> Option<&'static str> {
    if polynomial_growth(system, formula) {
        return Some(
            "the coefficients grow at most linearly, so all moments are finite, and the formula's \
             diffusion grows at most polynomially: the stochastic integral is square integrable",
        );
    }
    if linear_shift(system, &system.expand(formula)) {
        return Some(
            "the formula is a stochastic exponential whose coefficient does not explode under the \
             measure it defines, since the shifted coefficients grow at most linearly",
        );
    }
    None
}

/// Linear growth of the coordinates behind the formula and polynomial growth of its diffusion: the
/// integrand is square integrable (Karatzas and Shreve 1991, problem 5.3.15).
fn polynomial_growth(system: &System<'_>, formula: Expr) -> bool {
    let mut formulas = system.noise(formula);
    formulas.push(formula);
    let closure = system.closure(formulas.iter().copied());
    growth::is_linear(system, &closure)
        && formulas
            .into_iter()
            .all(|f| growth::degree(system, f).is_some())
}

/// `dF = c F dt + F g . dW`: the local martingale `F exp(-int c)` is a true one if the coordinates `Y`
/// behind `g` do not explode under the measure it defines, where the drift of `Y` has gained
/// `B R g`; at most linear growth of their coefficients before and after is enough (Cheridito,
/// Filipovic and Yor 2005, "Equivalent and absolutely continuous measure changes for jump-diffusion
/// processes"; for price models Sin 1998 and Andersen and Piterbarg 2007).
fn linear_shift(system: &System<'_>, expansion: &Expansion) -> bool {
    let pool = system.pool();
    let relative = |e: Expr| pool.simplify(pool.div(e, expansion.formula));
    let rate = relative(expansion.drift);
    let slopes: Vec<Expr> = expansion.diffusion.iter().map(|&b| relative(b)).collect();
    if !system.occurring(rate).is_empty() {
        return false;
    }
    let closure = system.closure(slopes.iter().copied());
    growth::is_linear(system, &closure)
        && growth::is_linear(&shifted(system, &closure, &slopes), &closure)
}

/// The system with drifts `a + B R g` of the given coordinates.
fn shifted<'a>(system: &System<'a>, closure: &[usize], slopes: &[Expr]) -> System<'a> {
    let pool: &Pool = system.pool();
    let mut moved = system.clone();
    for &i in closure {
        let gain = crate::calculus::bracket(system.model, &system.processes[i].diffusion, slopes);
        let drift = pool.add(system.processes[i].drift, gain);
        moved.processes.to_mut()[i].drift = pool.expand(pool.simplify(drift));
    }
    moved
}
