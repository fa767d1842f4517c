//! States that are normal given a square-root process y at both ends of a step (Andersen 2008, section 4).
//!
//! With the trapezoidal rule for `I = int y`, and `int sqrt(y) dB = (y' - y - level h + rate I)/s`, the coordinate moves by
//!
//! `free h + K0 + K1 y + K2 y' + sqrt((y + y')/2) sum_j rest_j dW_j`,
//!
//! `K0 = -shared level h/s`, `K1, K2 = h/2 (along + shared rate/s) -+ shared/s`. Where the mean of its exponential is kept,
//! `K0 + K1 y` is replaced by `-log E exp(A y') - h/4 rest^2 y`, `A = K2 + h/4 rest^2`, if that moment is finite (Andersen 2008,
//! section 4.3).

use super::Lowering;
use super::noise::Noise;
use super::rows::elapsed;
use crate::program::functions::UnaryOp;
use crate::program::op::{Comparison, ValueId};
use crate::scheme::{CarriedState, CarriedStep, Drawn, Method, SquareRootStep};
use crate::symbolic::Expr;

impl Lowering<'_> {
    /// The coordinates after a step, `after` being the value of the carrier's.
    pub(super) fn carried_states(
        &mut self,
        step: &CarriedStep,
        after: ValueId,
        noise: &Noise,
    ) -> Vec<(usize, ValueId)> {
        let group = self.plan.group_of(step.carrier);
        let Method::SquareRoot(carrier) = &self.plan.groups[group].method else {
            unreachable!("the carrier is a square-root process");
        };
        step.states
            .iter()
            .map(|state| {
                let value = self.carried_state(state, carrier, after, noise);
                (state.state, value)
            })
            .collect()
    }

    fn carried_state(
        &mut self,
        state: &CarriedState,
        carrier: &SquareRootStep,
        after: ValueId,
        noise: &Noise,
    ) -> ValueId {
        let pool = self.model.pool.clone();
        let before = self.current(carrier.state);
        let symbol = self.plan.coordinates[state.state].symbol;
        let free = pool.mul(state.free, self.length());
        let start = self.in_step(pool.add(pool.var(symbol), free));
        let (shift, slope, end_slope) = self.conditional_mean(state, carrier);
        let mut value = self.builder.add(start, shift);
        value = self.builder.mul_add(slope, before, value);
        value = self.builder.mul_add(end_slope, after, value);
        let text = format!(
            "Mean of {} after a step, given {} at both its ends.",
            self.coordinate_text(state.state),
            self.coordinate_text(carrier.state)
        );
        self.note(state.state, value, text);
        if let Some(part) = self.mixed(&state.rest, noise) {
            let half = self.builder.number(0.5);
            let sum = self.builder.add(before, after);
            let middle = self.builder.mul(half, sum);
            let root = self.builder.sqrt(middle);
            value = self.builder.mul_add(root, part, value);
        }
        let text = self.equation_text(state.state, "stepped by conditional_gaussian");
        self.note(state.state, value, text);
        value
    }

    /// `K0`, `K1` and `K2`, or what stands in their place.
    fn conditional_mean(
        &mut self,
        state: &CarriedState,
        carrier: &SquareRootStep,
    ) -> (ValueId, ValueId, ValueId) {
        let pool = self.model.pool.clone();
        let length = self.length();
        let ratio = pool.simplify(pool.div(state.shared, pool.sqrt(carrier.square)));
        let half = pool.mul(pool.ratio(1, 2), length);
        let inner = pool.simplify(pool.add(state.along, pool.mul(ratio, carrier.rate)));
        let inside = pool.mul(half, inner);
        let shift = self.in_step(pool.neg(pool.product([ratio, carrier.level, length])));
        let slope = self.in_step(pool.sub(inside, ratio));
        let end_slope = self.in_step(pool.add(inside, ratio));
        if !state.keeps_growth {
            return (shift, slope, end_slope);
        }
        let quarter = pool.product([pool.ratio(1, 4), length, state.rest_square]);
        let quarter = self.in_step(quarter);
        let weight = self.builder.add(end_slope, quarter);
        let kept = match carrier.draw {
            Drawn::Exactly => self.exact_moment(carrier, weight),
            Drawn::ByMoments(_) => {
                let (log, finite) = self.log_moment(carrier, weight);
                Moment {
                    finite,
                    constant: log,
                    slope: self.builder.number(0.0),
                }
            }
        };
        let zero = self.builder.number(0.0);
        let constant = self.builder.neg(kept.constant);
        let loss = self.builder.add(kept.slope, quarter);
        let loss = self.builder.neg(loss);
        let sides = (zero, kept.finite);
        let shift = self
            .builder
            .select(Comparison::Less, sides, constant, shift);
        let slope = self.builder.select(Comparison::Less, sides, loss, slope);
        self.builder.hint(
            slope,
            format!("slope_{}", self.model.states[state.state].name),
        );
        (shift, slope, end_slope)
    }

    /// The moment of the noncentral chi-square transition: with `2 c` the scale, `(1 - 2 A c)^(-d/2) exp(A decay y/(1 - 2 A c))`
    /// (Johnson, Kotz and Balakrishnan 1995, chapter 29).
    fn exact_moment(&mut self, carrier: &SquareRootStep, weight: ValueId) -> Moment {
        let pool = self.model.pool.clone();
        let negative = pool.neg(carrier.rate);
        let window = elapsed(self, negative);
        let scale = pool.product([pool.ratio(1, 2), carrier.square, window]);
        let scale = self.in_step(scale);
        let decay = self.in_step(pool.exp(pool.mul(negative, self.length())));
        let freedom = self.in_step(pool.mul(pool.ratio(-1, 2), carrier.dimension));
        let one = self.builder.number(1.0);
        let product = self.builder.mul(weight, scale);
        let finite = self.builder.sub(one, product);
        let log = self.builder.unary(UnaryOp::Log, finite);
        let constant = self.builder.mul(freedom, log);
        let slope = self.builder.mul(weight, decay);
        let slope = self.builder.div(slope, finite);
        Moment {
            finite,
            constant,
            slope,
        }
    }

    /// A weighted sum of the drivers' increments; none where all weights are zero.
    pub(super) fn mixed(&mut self, weights: &[Expr], noise: &Noise) -> Option<ValueId> {
        let mut uniform = Vec::new();
        for (driver, &weight) in weights.iter().enumerate() {
            if !self.model.pool.is_zero_literal(weight) {
                uniform.push((self.component(driver), self.in_step(weight)));
            }
        }
        let mixture = noise.combine(self, &uniform);
        self.gaussian_part(None, &mixture)
    }
}

/// `log E exp(A y')`, which is finite where `finite > 0`, as `constant + slope y`.
struct Moment {
    finite: ValueId,
    constant: ValueId,
    slope: ValueId,
}
