//! Exact steps of square-root processes.
//!
//! With `decay = exp(-rate h)`, `c = s^2/4 int_0^h exp(-rate u) du` and `lambda = y decay/c`, the value after
//! a step is `c` times a noncentral chi-square variable of `d` degrees of freedom and noncentrality
//! `lambda`, drawn as
//!
//! - `(Z + sqrt(lambda))^2 + 2 Gamma((d - 1)/2)` for `d >= 1`,
//! - `2 Gamma(d/2 + N)` with `N` Poisson of mean `lambda/2` for `0 < d < 1` (Johnson, Kotz and Balakrishnan
//!   1995, chapter 29; Glasserman 2003, section 3.4),
//! - if it stays at zero once there: 0 where `G = Gamma(1 - d/2)` exceeds `lambda/2`, else `2 Gamma(N + 1)`
//!   with `N` Poisson of mean `lambda/2 - G` (Makarov and Glew 2010, "Exact simulation of Bessel
//!   diffusions", from memory; at `d = 0` the noncentral chi-square law of Siegel 1979).
//!
//! Which of these it is may hang on the parameters; it is the same on all paths. Where `rate` and `s` depend on time,
//! `decay` is `exp(-int rate)` over the step and `c = 1/4 int s(u)^2 exp(-int_u rate) du`.

use super::Lowering;
use super::noise::Noise;
use super::rows::elapsed;
use crate::analysis::square_root::AtZero;
use crate::program::functions::BinaryOp;
use crate::program::op::{Comparison, DrawLaw, Op, ValueId};
use crate::scheme::{Drawn, SquareRootStep};
use crate::symbolic::Sign;

/// A condition on the parameters.
#[derive(Clone, Copy)]
enum Case {
    Never,
    Always,
    If(Comparison, ValueId, ValueId),
}

/// How the coefficients go over a step.
#[derive(Clone, Copy)]
enum Window {
    /// They do not depend on time.
    Still {
        /// `int_0^h exp(-rate u) du`.
        elapsed: ValueId,
    },
    /// They do: decay and scale are integrated.
    Moving {
        /// What the drift adds over the step.
        moved: ValueId,
    },
}

/// The coefficients of a step, the same on all paths.
struct Coefficients {
    dimension: ValueId,
    decay: ValueId,
    window: Window,
    /// `2 c`.
    scale: ValueId,
    /// The process stays at zero once there.
    absorbing: Case,
    /// The first of the three ways to draw.
    shifted: Case,
}

impl Lowering<'_> {
    /// The coordinate of a square-root state after a step.
    pub(super) fn square_root_state(&mut self, step: &SquareRootStep, noise: &Noise) -> ValueId {
        if let Drawn::ByMoments(unit) = &step.draw {
            return self.quadratic_exponential_state(step, unit, noise);
        }
        let coefficients = self.square_root_coefficients(step);
        let current = self.current(step.state);
        let rest = self.rest(step, &coefficients, current);
        let part = self.shifted_normal(step, &coefficients, current);
        let shape = self.shape(step, &coefficients, rest);
        let gamma = self.other_draw(step.state, DrawLaw::Gamma, "gamma", shape);
        let mut value = match part {
            Some(part) => self.builder.mul_add(coefficients.scale, gamma, part),
            None => self.builder.mul(coefficients.scale, gamma),
        };
        let zero = self.builder.number(0.0);
        if !matches!(coefficients.absorbing, Case::Never) {
            let sides = (rest, zero);
            let stopped = self
                .builder
                .select(Comparison::LessEqual, sides, zero, value);
            value = self.choose(coefficients.absorbing, stopped, value);
        }
        if !self.model.pool.sign(step.square).is_positive() {
            value = self.without_noise(step, &coefficients, current, value);
        }
        let text = self.equation_text(
            step.state,
            "drawn from its noncentral chi-square transition",
        );
        self.note(step.state, value, text);
        value
    }

    /// The value where the noise may vanish, and with it the scale: what the drift alone leads to.
    fn without_noise(
        &mut self,
        step: &SquareRootStep,
        coefficients: &Coefficients,
        current: ValueId,
        value: ValueId,
    ) -> ValueId {
        let zero = self.builder.number(0.0);
        let (quiet, moved) = match coefficients.window {
            Window::Still { elapsed } => {
                let drift = self.in_step(step.level);
                (self.in_step(step.square), self.builder.mul(drift, elapsed))
            }
            Window::Moving { moved } => (coefficients.scale, moved),
        };
        let mut without = self.builder.mul_add(coefficients.decay, current, moved);
        if !self.model.pool.sign(step.level).is_non_negative() {
            without = self.builder.binary(BinaryOp::Max, without, zero);
        }
        let sides = (quiet, zero);
        self.builder
            .select(Comparison::LessEqual, sides, without, value)
    }

    fn square_root_coefficients(&mut self, step: &SquareRootStep) -> Coefficients {
        let pool = self.model.pool.clone();
        let name = self.model.states[step.state].name.clone();
        let dimension = self.in_step(step.dimension);
        let (decay, scale, window) = match step.moving {
            true => self.moving_window(step),
            false => self.still_window(step),
        };
        for (value, hint) in [(dimension, "dimension"), (decay, "decay"), (scale, "scale")] {
            self.builder.hint(value, format!("{hint}_{name}"));
        }
        let coordinate = self.coordinate_text(step.state);
        let text = format!(
            "Degrees of freedom of the transition of {coordinate}: {}.",
            pool.format(step.dimension)
        );
        self.note(step.state, dimension, text);
        let text = format!(
            "What is left of {coordinate} after a step at the rate {}.",
            pool.format(step.rate)
        );
        self.note(step.state, decay, text);
        let text = format!(
            "Twice the scale of the chi-square variable that {coordinate} is after a step."
        );
        self.note(step.state, scale, text);
        let (absorbing, shifted) = self.cases(step, dimension);
        Coefficients {
            dimension,
            decay,
            window,
            scale,
            absorbing,
            shifted,
        }
    }

    /// Decay and twice the scale where nothing depends on time.
    fn still_window(&mut self, step: &SquareRootStep) -> (ValueId, ValueId, Window) {
        let pool = self.model.pool.clone();
        let negative = pool.neg(step.rate);
        let decay = self.in_step(pool.exp(pool.mul(negative, self.length())));
        let window = elapsed(self, negative);
        let elapsed = self.in_step(window);
        let scale = pool.product([pool.ratio(1, 2), step.square, window]);
        (decay, self.in_step(scale), Window::Still { elapsed })
    }

    /// Decay and twice the scale, integrated over the step: `c' = s^2/4 - rate c` is the mean of a linear equation,
    /// and the decay its transition. Beside it what the drift adds.
    fn moving_window(&mut self, step: &SquareRootStep) -> (ValueId, ValueId, Window) {
        let pool = self.model.pool.clone();
        let rate = self.at_instant(pool.neg(step.rate));
        let push = self.at_instant(pool.div(step.square, pool.int(2)));
        let level = self.at_instant(step.level);
        let zero = self.builder.number(0.0);
        let (start, length) = (self.builder.start(), self.builder.length());
        let law = self.builder.matrix(Op::MovingTransition {
            dim: 2,
            a: [rate, zero, zero, rate].into(),
            alpha: [push, level].into(),
            q: [zero; 4].into(),
            start,
            length,
        });
        let [decay, scale, moved] = [0, 4, 5].map(|entry| self.builder.extract(law, entry));
        (decay, scale, Window::Moving { moved })
    }

    /// Whether the process stays at zero, and whether a shifted normal can be split off.
    fn cases(&mut self, step: &SquareRootStep, dimension: ValueId) -> (Case, Case) {
        let [zero, one, two] = [0.0, 1.0, 2.0].map(|n| self.builder.number(n));
        let [against_zero, against_one, against_two] = step.against;
        match step.at_zero {
            AtZero::NotReached => (Case::Never, Case::Always),
            AtZero::Reflected => {
                let absorbing = match against_zero {
                    Sign::Positive => Case::Never,
                    _ => Case::If(Comparison::LessEqual, dimension, zero),
                };
                let shifted = match against_one {
                    s if s.is_non_negative() => Case::Always,
                    s if s.is_non_positive() => Case::Never,
                    _ => Case::If(Comparison::LessEqual, one, dimension),
                };
                (absorbing, shifted)
            }
            AtZero::Absorbed if against_two == Sign::Negative => (Case::Always, Case::Never),
            AtZero::Absorbed => (
                Case::If(Comparison::Less, dimension, two),
                Case::If(Comparison::LessEqual, two, dimension),
            ),
        }
    }

    fn choose(&mut self, case: Case, then: ValueId, otherwise: ValueId) -> ValueId {
        match case {
            Case::Always => then,
            Case::Never => otherwise,
            Case::If(compare, a, b) => self.builder.select(compare, (a, b), then, otherwise),
        }
    }

    /// `lambda/2`, less the gamma variable that decides on absorption.
    fn rest(
        &mut self,
        step: &SquareRootStep,
        coefficients: &Coefficients,
        current: ValueId,
    ) -> ValueId {
        let factor = self.builder.div(coefficients.decay, coefficients.scale);
        let half = self.builder.mul(current, factor);
        if matches!(coefficients.absorbing, Case::Never) {
            return half;
        }
        let [zero, one, weight] = [0.0, 1.0, 0.5].map(|n| self.builder.number(n));
        let part = self.builder.mul(coefficients.dimension, weight);
        let shape = self.builder.sub(one, part);
        let shape = self.builder.binary(BinaryOp::Max, shape, zero);
        let shape = self.choose(coefficients.absorbing, shape, zero);
        let threshold = self.other_draw(step.state, DrawLaw::Gamma, "absorption", shape);
        self.builder.sub(half, threshold)
    }

    /// `c (Z + sqrt(lambda))^2`, where that is how it is drawn.
    fn shifted_normal(
        &mut self,
        step: &SquareRootStep,
        coefficients: &Coefficients,
        current: ValueId,
    ) -> Option<ValueId> {
        if matches!(coefficients.shifted, Case::Never) {
            return None;
        }
        let [zero, weight] = [0.0, 0.5].map(|n| self.builder.number(n));
        let normal = self.own_normal(step.state, None);
        let variance = self.builder.mul(coefficients.scale, weight);
        let deviation = self.builder.sqrt(variance);
        let left = self.builder.mul(current, coefficients.decay);
        let centre = self.builder.sqrt(left);
        let root = self.builder.mul_add(deviation, normal, centre);
        let square = self.builder.mul(root, root);
        Some(self.choose(coefficients.shifted, square, zero))
    }

    /// The shape of the gamma variable.
    fn shape(
        &mut self,
        step: &SquareRootStep,
        coefficients: &Coefficients,
        rest: ValueId,
    ) -> ValueId {
        let [zero, one, weight] = [0.0, 1.0, 0.5].map(|n| self.builder.number(n));
        let less = self.builder.sub(coefficients.dimension, one);
        let beside_normal = self.builder.mul(less, weight);
        // At dimension 1 rounding must not make it negative.
        let beside_normal = self.builder.binary(BinaryOp::Max, beside_normal, zero);
        if matches!(coefficients.shifted, Case::Always) {
            return beside_normal;
        }
        let mean = match coefficients.absorbing {
            Case::Never => rest,
            _ => self.builder.binary(BinaryOp::Max, rest, zero),
        };
        let mean = self.choose(coefficients.shifted, zero, mean);
        let count = self.other_draw(step.state, DrawLaw::Poisson, "poisson", mean);
        let half = self.builder.mul(coefficients.dimension, weight);
        let reflected = self.builder.add(count, half);
        let absorbed = self.builder.add(count, one);
        let counted = self.choose(coefficients.absorbing, absorbed, reflected);
        self.choose(coefficients.shifted, beside_normal, counted)
    }
}
