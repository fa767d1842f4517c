//! Square-root processes by the quadratic-exponential scheme (Andersen 2008, section 3.2).
//!
//! With mean m and variance of the noncentral chi-square transition, `psi` their squared coefficient of variation and Z the
//! standardised increment of the process's own Brownian motion, the value after a step is
//!
//! - `a (b + Z)^2` where `psi <= 1.5`, with `b^2 = 2/psi - 1 + sqrt(2/psi (2/psi - 1))` and `a = m/(1 + b^2)`,
//! - elsewhere 0 with probability `p = (psi - 1)/(psi + 1)` and exponential of rate `(1 - p)/m` beside it, read off the normal
//!   distribution function of Z.

use super::Lowering;
use super::noise::Noise;
use super::rows::elapsed;
use crate::program::functions::{BinaryOp, UnaryOp};
use crate::program::op::{Comparison, ValueId};
use crate::scheme::SquareRootStep;
use crate::symbolic::Expr;

/// Where one form gives way to the other: between 1 and 2, where both exist (Andersen 2008, section 3.2.3).
const CRITICAL: f64 = 1.5;

/// The two distributions on each path that match the transition's mean and variance.
struct Fit {
    mean: ValueId,
    /// `psi`.
    psi: ValueId,
    /// `b^2` and `a` of the quadratic form.
    offset: ValueId,
    scale: ValueId,
    /// `1 - p` and the rate of the exponential form.
    share: ValueId,
    rate: ValueId,
}

impl Lowering<'_> {
    /// The coordinate of a square-root state after a step. `unit`: the coefficients of the drivers' increments in that of the
    /// process's own Brownian motion.
    pub(super) fn quadratic_exponential_state(
        &mut self,
        step: &SquareRootStep,
        unit: &[Expr],
        noise: &Noise,
    ) -> ValueId {
        let fit = self.fit(step);
        let normal = self.standardised(unit, noise);
        let [zero, critical] = [0.0, CRITICAL].map(|n| self.builder.number(n));
        let offset = self.builder.sqrt(fit.offset);
        let root = self.builder.add(offset, normal);
        let square = self.builder.mul(root, root);
        let quadratic = self.builder.mul(fit.scale, square);
        let opposite = self.builder.neg(normal);
        let tail = self.builder.unary(UnaryOp::NormalCdf, opposite);
        let ratio = self.builder.div(fit.share, tail);
        let log = self.builder.unary(UnaryOp::Log, ratio);
        let above = self.builder.binary(BinaryOp::Max, log, zero);
        let exponential = self.builder.div(above, fit.rate);
        let sides = (fit.psi, critical);
        let value = self
            .builder
            .select(Comparison::LessEqual, sides, quadratic, exponential);
        // Nothing is left, and nothing comes in.
        let value = self
            .builder
            .select(Comparison::LessEqual, (fit.mean, zero), zero, value);
        let text = self.equation_text(step.state, "stepped by quadratic_exponential");
        self.note(step.state, value, text);
        value
    }

    /// The logarithm of `E exp(weight y)` over the step, and a number that is positive where that is finite.
    pub(super) fn log_moment(
        &mut self,
        step: &SquareRootStep,
        weight: ValueId,
    ) -> (ValueId, ValueId) {
        let fit = self.fit(step);
        let [one, two, half, critical] = [1.0, 2.0, 0.5, CRITICAL].map(|n| self.builder.number(n));
        let scaled = self.builder.mul(weight, fit.scale);
        let twice = self.builder.mul(two, scaled);
        let left = self.builder.sub(one, twice);
        let product = self.builder.mul(scaled, fit.offset);
        let exponent = self.builder.div(product, left);
        let log = self.builder.unary(UnaryOp::Log, left);
        let part = self.builder.mul(half, log);
        let quadratic = self.builder.sub(exponent, part);
        let gap = self.builder.sub(fit.rate, weight);
        let atom = self.builder.sub(one, fit.share);
        let beside = self.builder.mul(fit.rate, fit.share);
        let beside = self.builder.div(beside, gap);
        let moment = self.builder.add(atom, beside);
        let exponential = self.builder.unary(UnaryOp::Log, moment);
        let sides = (fit.psi, critical);
        let mut choose = |then, otherwise| {
            self.builder
                .select(Comparison::LessEqual, sides, then, otherwise)
        };
        (choose(quadratic, exponential), choose(left, gap))
    }

    fn fit(&mut self, step: &SquareRootStep) -> Fit {
        let pool = self.model.pool.clone();
        let negative = pool.neg(step.rate);
        let window = elapsed(self, negative);
        let decay = self.in_step(pool.exp(pool.mul(negative, self.length())));
        let inflow = self.in_step(pool.mul(step.level, window));
        let spread = self.in_step(pool.mul(step.square, window));
        let [one, two, half] = [1.0, 2.0, 0.5].map(|n| self.builder.number(n));
        let current = self.current(step.state);
        let left = self.builder.mul(current, decay);
        let mean = self.builder.add(left, inflow);
        let middle = self.builder.mul_add(half, inflow, left);
        let variance = self.builder.mul(spread, middle);
        let square = self.builder.mul(mean, mean);
        let psi = self.builder.div(variance, square);
        let ratio = self.builder.div(two, psi);
        let less = self.builder.sub(ratio, one);
        let product = self.builder.mul(ratio, less);
        let root = self.builder.sqrt(product);
        let offset = self.builder.add(less, root);
        let whole = self.builder.add(one, offset);
        let scale = self.builder.div(mean, whole);
        let above = self.builder.add(psi, one);
        let share = self.builder.div(two, above);
        let rate = self.builder.div(share, mean);
        let name = &self.model.states[step.state].name;
        self.builder.hint(psi, format!("psi_{name}"));
        self.builder.hint(mean, format!("mean_{name}"));
        Fit {
            mean,
            psi,
            offset,
            scale,
            share,
            rate,
        }
    }

    /// The increment of `sum_j unit_j W_j` over the step, divided by the root of its length.
    fn standardised(&mut self, unit: &[Expr], noise: &Noise) -> ValueId {
        let pool = self.model.pool.clone();
        let root = pool.sqrt(self.length());
        let over = |e: Expr| pool.div(e, root);
        let weights: Vec<Expr> = unit.iter().map(|&b| over(b)).collect();
        self.mixed(&weights, noise)
            .expect("the process has a driver")
    }
}
