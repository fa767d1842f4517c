//! Stochastic calculus on typed models: Ito's rule, its generator, and the conversion of Stratonovich
//! equations to Ito's.
//!
//! A [`Process`] is a drift and one diffusion coefficient per declared driver. The drivers are
//! correlated: `d<W_j, W_k> = R_jk dt` with the model's correlation matrix `R`, so second-order terms
//! always carry `R`. Each rule logs what it did in a [`Trace`], in the order in which a careful person
//! would write it down; reports show the log and never reconstruct it.
//!
//! Sources: K. Ito (1951), "On a formula concerning stochastic differentials"; I. Karatzas and
//! S. Shreve (1991), "Brownian Motion and Stochastic Calculus", sections 3.3 and 3.3.C (Stratonovich).

mod ito;
mod stratonovich;
mod system;

pub use ito::{bracket, covariation, expand};
pub use stratonovich::ito_drift;
pub use system::System;

use crate::model::{Calculus, Model};
use crate::symbolic::Expr;
use crate::symbolic::trace::Trace;

/// `drift dt + sum_j diffusion[j] dW_j` under the declared, correlated drivers, in Ito's sense.
#[derive(Clone, Debug)]
pub struct Process {
    /// Coefficient of `dt`.
    pub drift: Expr,
    /// Coefficients of the drivers' increments, one per driver of the model.
    pub diffusion: Vec<Expr>,
}

/// Ito's rule applied to one formula, with its working.
#[derive(Clone, Debug)]
pub struct Expansion {
    /// The formula `F(t, x)`.
    pub formula: Expr,
    /// Time derivative and first-order part: `F_t + sum_i F_i a_i`.
    pub chain_rule_drift: Expr,
    /// Second-order part: `1/2 sum_ij F_ij (B R B')_ij`.
    pub ito_correction: Expr,
    /// Their sum, simplified.
    pub drift: Expr,
    /// `sum_i F_i B_ij` for each driver `j`, simplified.
    pub diffusion: Vec<Expr>,
    /// The steps.
    pub trace: Trace,
}

impl Expansion {
    /// The process without its working.
    pub fn process(&self) -> Process {
        Process {
            drift: self.drift,
            diffusion: self.diffusion.clone(),
        }
    }
}

/// The Ito dynamics of a model.
#[derive(Clone, Debug)]
pub struct Dynamics {
    /// One process per state, in the model's order.
    pub states: Vec<Process>,
    /// How each Stratonovich drift was converted, per state; empty traces for Ito models.
    pub conversion: Vec<Trace>,
    /// One expansion per derived quantity, in the model's order.
    pub derived: Vec<Expansion>,
}

/// Ito dynamics of the states and of every derived quantity.
pub fn dynamics(model: &Model) -> Dynamics {
    let (states, conversion): (Vec<_>, Vec<_>) = (0..model.states.len())
        .map(|i| {
            let (drift, trace) = match model.calculus {
                Calculus::Ito => (model.states[i].drift.expr, Trace::default()),
                Calculus::Stratonovich => ito_drift(model, i),
            };
            let diffusion = model.states[i].diffusion.clone();
            (Process { drift, diffusion }, trace)
        })
        .unzip();
    let derived = model
        .derived
        .iter()
        .map(|d| expand(model, &states, d.formula.expr))
        .collect();
    Dynamics {
        states,
        conversion,
        derived,
    }
}
