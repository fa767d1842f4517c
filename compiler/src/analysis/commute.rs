//! Lie derivatives along the noise, and whether the noise commutes.
//!
//! `L^j f = sum_i B_ij df/dx_i` (Kloeden and Platen 1992, section 10.3). Being a derivative along a
//! vector field it does not depend on coordinates: for a function of the states that stands for a
//! coordinate's noise it gives the same as the formula in the coordinates would.

use super::dependence::mentioned;
use crate::calculus::Dynamics;
use crate::model::Model;
use crate::symbolic::{Expr, Truth};

/// `L^j f`, in the states.
pub fn along_noise(model: &Model, dynamics: &Dynamics, driver: usize, f: Expr) -> Expr {
    let pool = &model.pool;
    let terms = mentioned(model, f).into_iter().filter_map(|i| {
        let b = dynamics.states[i].diffusion[driver];
        let slope = || pool.derivative(f, model.states[i].symbol);
        (!pool.is_zero_literal(b)).then(|| pool.mul(b, slope()))
    });
    let terms: Vec<Expr> = terms.collect();
    pool.simplify(pool.sum(terms))
}

/// The drivers along which something can happen to the noise `b` of a coordinate: its own and those of
/// the states it depends on. Along any other `L^j b` is zero.
pub fn relevant_drivers(model: &Model, dynamics: &Dynamics, b: &[Expr]) -> Vec<usize> {
    let nonzero = |row: &[Expr]| -> Vec<usize> {
        (0..row.len())
            .filter(|&j| !model.pool.is_zero_literal(row[j]))
            .collect()
    };
    let mut found = nonzero(b);
    for state in found
        .clone()
        .into_iter()
        .flat_map(|j| mentioned(model, b[j]))
    {
        found.extend(nonzero(&dynamics.states[state].diffusion));
    }
    found.sort_unstable();
    found.dedup();
    found
}

/// Two drivers whose noise does not commute.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Clash {
    /// One driver.
    pub first: usize,
    /// The other.
    pub second: usize,
    /// `L^first b^second - L^second b^first`, in the states.
    pub difference: Expr,
    /// Whether it is certain that the difference is not zero.
    pub certain: bool,
}

/// Whether for the noise `b` of one coordinate (in the states, one entry per driver)
/// `L^j b^k = L^k b^j` for all pairs of drivers; else the first pair for which that is not proved.
pub fn clash(model: &Model, dynamics: &Dynamics, b: &[Expr]) -> Option<Clash> {
    let pool = &model.pool;
    let drivers = relevant_drivers(model, dynamics, b);
    for (position, &first) in drivers.iter().enumerate() {
        for &second in &drivers[position + 1..] {
            let forth = along_noise(model, dynamics, first, b[second]);
            let back = along_noise(model, dynamics, second, b[first]);
            let certain = match pool.equal(forth, back) {
                Truth::Yes => continue,
                Truth::No(_) => true,
                Truth::CannotTell => false,
            };
            let difference = pool.simplify(pool.sub(forth, back));
            return Some(Clash {
                first,
                second,
                difference,
                certain,
            });
        }
    }
    None
}
