//! Milstein's terms, for noise that commutes and for noise that does not.
//!
//! The scheme adds `sum_jk L^j b^k I_(j,k)` with the iterated integrals `I_(j,k)` of the drivers (Kloeden and Platen
//! 1992, section 10.3). With the Levy area `A_jk = (I_(j,k) - I_(k,j))/2` and the product rule,
//! `I_(j,k) + I_(k,j) = dW_j dW_k - rho_jk h` for correlated drivers too, a pair of drivers adds
//!
//! `(L^j b^k + L^k b^j)/2 (dW_j dW_k - rho_jk h) + (L^j b^k - L^k b^j) A_jk`,
//!
//! where the last term is zero for noise that commutes.

use super::approximate::Context;
use super::step::Frame;
use crate::analysis::commute::{along_noise, relevant_drivers};
use crate::calculus::Dynamics;
use crate::model::Model;
use crate::symbolic::Expr;

/// The non-zero coefficients of `dW_j dW_k - rho_jk h` and of the areas `A_jk`, `j <= k`.
#[derive(Default)]
pub(super) struct Terms {
    pub(super) products: Vec<(usize, usize, Expr)>,
    pub(super) areas: Vec<(usize, usize, Expr)>,
}

/// Milstein's terms for the noise `b` of a coordinate.
pub(super) fn terms(model: &Model, dynamics: &Dynamics, b: &[Expr], frame: &Frame<'_>) -> Terms {
    let pool = &model.pool;
    let drivers = relevant_drivers(model, dynamics, b);
    let half = |e: Expr| pool.mul(pool.ratio(1, 2), e);
    let mut terms = Terms::default();
    for (position, &j) in drivers.iter().enumerate() {
        for &k in &drivers[position..] {
            let forth = along_noise(model, dynamics, j, b[k]);
            let (product, area) = if j == k {
                (half(forth), pool.zero())
            } else {
                let back = along_noise(model, dynamics, k, b[j]);
                match pool.equal(forth, back).is_yes() {
                    true => (forth, pool.zero()),
                    false => (half(pool.add(forth, back)), pool.sub(forth, back)),
                }
            };
            let push = |list: &mut Vec<_>, coefficient: Expr| {
                let coefficient = frame.write(coefficient);
                if !pool.is_zero_literal(coefficient) {
                    list.push((j, k, coefficient));
                }
            };
            push(&mut terms.products, product);
            push(&mut terms.areas, area);
        }
    }
    terms
}

/// Why the terms of a state cannot be drawn: a driver that reaches its noise, which an exact law uses up.
pub(super) fn used_up(context: &Context<'_>, state: usize) -> Option<String> {
    let (model, dynamics) = (context.model, context.dynamics);
    let noise = &context.coordinates[state].process.diffusion;
    let drivers = relevant_drivers(model, dynamics, noise);
    let taken = |&driver: &usize| {
        let user = (0..model.states.len()).find(|&i| {
            context.own_law[i]
                && !model
                    .pool
                    .is_zero_literal(dynamics.states[i].diffusion[driver])
        });
        Some((driver, user?))
    };
    drivers.iter().find_map(taken).map(|(driver, user)| {
        format!(
            "its terms need the increments of {}, which the exact law of {} uses up",
            model.drivers[driver].name, model.states[user].name
        )
    })
}
