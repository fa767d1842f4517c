//! Conversion of Stratonovich equations to Ito's.

use super::ito::log;
use crate::model::Model;
use crate::symbolic::Expr;
use crate::symbolic::trace::Trace;

/// The Ito drift of state `i` of a Stratonovich model, with the steps that lead to it.
///
/// With `dX = a dt + sum_k B_k o dW_k` and `d<W_j, W_k> = R_jk dt` the correction is
/// `1/2 sum_jk R_jk sum_l B_lj dB_ik/dx_l`: half the covariation of the coefficient with its driver
/// (Karatzas and Shreve 1991, section 3.3.C; the correlation enters through `d<W_j, W_k>`).
pub fn ito_drift(model: &Model, i: usize) -> (Expr, Trace) {
    let pool = &model.pool;
    let state = &model.states[i];
    let mut trace = Trace::default();
    let mut corrections = Vec::new();
    for (k, &coefficient) in state.diffusion.iter().enumerate() {
        let rate = coefficient_covariation(model, coefficient, k, &mut trace);
        if !pool.is_zero_literal(rate) {
            let driver = &model.drivers[k].name;
            let note = format!("covariation rate of the coefficient of d{driver} with {driver}");
            let simple = pool.simplify(rate);
            log(&mut trace, "covariation", note, Some(rate), simple);
            corrections.push(rate);
        }
    }
    let raw = pool.mul(pool.ratio(1, 2), pool.sum(corrections));
    let correction = pool.simplify(raw);
    let note = "half of these covariations".to_owned();
    log(
        &mut trace,
        "Stratonovich correction",
        note,
        Some(raw),
        correction,
    );
    let sum = pool.add(state.drift.expr, correction);
    let drift = pool.simplify(sum);
    let note = format!("Stratonovich drift of {} plus the correction", state.name);
    log(&mut trace, "Ito drift", note, Some(sum), drift);
    (drift, trace)
}

/// `d<b, W_k>/dt = sum_l (db/dx_l) sum_j B_lj R_jk` of a coefficient `b` with driver `k`; logs the
/// derivatives it takes.
fn coefficient_covariation(model: &Model, b: Expr, k: usize, trace: &mut Trace) -> Expr {
    let pool = &model.pool;
    let mut terms = Vec::new();
    for other in &model.states {
        if !pool.depends_on(b, other.symbol) {
            continue;
        }
        let slope = pool.derivative(b, other.symbol);
        let note = format!(
            "coefficient of d{}: d/d{}",
            model.drivers[k].name, other.name
        );
        log(
            trace,
            "first derivative",
            note,
            Some(b),
            pool.simplify(slope),
        );
        for (j, &noise) in other.diffusion.iter().enumerate() {
            terms.push(pool.product([slope, noise, model.correlation[j][k]]));
        }
    }
    pool.sum(terms)
}
