//! Exact steps of Brownian motions with a random drift, and of their distance from the start.
//!
//! With V uniform, out of a normal number by its distribution function, and standard normal Z:
//!
//! - on the line `u` moves by `m h + s sqrt(h) Z` where `2 m V <= m + f(u)`, else by `-m h + s sqrt(h) Z`;
//! - on the half line the vector of length `u` had the component `w u` along the drift, `w` of density
//!   proportional to `exp(k u w)` on [-1, 1] with `k = m/s^2`: `w u = u + log(1 + V (exp(-2 k u) - 1))/k`, by the inverse
//!   of its distribution function (Wood 1994 for the law of von Mises and Fisher). The vector moves by `m h` along
//!   the drift and by a normal number in each of three directions; the new value is its length.

use super::Lowering;
use crate::analysis::random_drift::Shape;
use crate::program::functions::{BinaryOp, UnaryOp};
use crate::program::op::{Comparison, ValueId};
use crate::scheme::RandomDriftStep;
use crate::symbolic::Function;

impl Lowering<'_> {
    /// The coordinate of such a state after a step.
    pub(super) fn random_drift_state(&mut self, step: &RandomDriftStep) -> ValueId {
        let pool = self.model.pool.clone();
        let name = self.model.states[step.state].name.clone();
        let coordinate = self.coordinate_text(step.state);
        let length = self.length();
        let gain = self.in_step(pool.mul(step.speed, length));
        let deviation = self.in_step(pool.sqrt(pool.mul(step.square, length)));
        self.builder.hint(gain, format!("gain_{name}"));
        self.builder.hint(deviation, format!("deviation_{name}"));
        let text = format!("What the drift moves {coordinate} by over a step, up or down.");
        self.note(step.state, gain, text);
        let text = format!("Standard deviation of {coordinate} over a step, given the drift.");
        self.note(step.state, deviation, text);
        let (value, what) = match step.shape {
            Shape::Line => (
                self.either_way(step, gain, deviation),
                "drawn from a mixture of two normal laws",
            ),
            Shape::HalfLine => (
                self.distance(step, gain, deviation),
                "drawn as the length of a vector that moves with a drift",
            ),
        };
        let text = self.equation_text(step.state, what);
        self.note(step.state, value, text);
        value
    }

    /// A uniform number of the state's own.
    fn own_uniform(&mut self, state: usize, purpose: &str) -> ValueId {
        let normal = self.own_normal(state, Some(purpose));
        self.builder.unary(UnaryOp::NormalCdf, normal)
    }

    fn either_way(&mut self, step: &RandomDriftStep, gain: ValueId, deviation: ValueId) -> ValueId {
        let pool = self.model.pool.clone();
        let twice = self.in_step(pool.mul(pool.int(2), step.speed));
        let share = self.in_step(pool.add(step.speed, step.drift));
        let uniform = self.own_uniform(step.state, "drift");
        let place = self.builder.mul(twice, uniform);
        let down = self.builder.unary(UnaryOp::Neg, gain);
        let sides = (place, share);
        let moved = self
            .builder
            .select(Comparison::LessEqual, sides, gain, down);
        let current = self.current(step.state);
        let mean = self.builder.add(current, moved);
        let normal = self.own_normal(step.state, None);
        self.builder.mul_add(deviation, normal, mean)
    }

    fn distance(&mut self, step: &RandomDriftStep, gain: ValueId, deviation: ValueId) -> ValueId {
        let current = self.current(step.state);
        let component = self.component_along_drift(step, current);
        let after = self.builder.add(component, gain);
        let beyond = self.builder.sub(current, component);
        let within = self.builder.add(current, component);
        let square = self.builder.mul(beyond, within);
        let across = self.builder.sqrt(square);
        let mut total = None;
        for (purpose, start) in [
            (None, Some(after)),
            (Some("across"), Some(across)),
            (Some("aside"), None),
        ] {
            let normal = self.own_normal(step.state, purpose);
            let side = match start {
                Some(start) => self.builder.mul_add(deviation, normal, start),
                None => self.builder.mul(deviation, normal),
            };
            total = Some(match total {
                Some(total) => self.builder.mul_add(side, side, total),
                None => self.builder.mul(side, side),
            });
        }
        let total = total.expect("there are three directions");
        self.builder.sqrt(total)
    }

    /// `w u`, drawn given `u`. The logarithm is `2 atanh(z/(2 + z))` of `z = V (exp(-2 c) - 1)`, which keeps its digits
    /// where `c`, the concentration times `u`, is small.
    fn component_along_drift(&mut self, step: &RandomDriftStep, current: ValueId) -> ValueId {
        let pool = self.model.pool.clone();
        let concentration = pool.simplify(pool.div(step.speed, step.square));
        let less = self.in_step(pool.mul(pool.int(-2), concentration));
        let reach = self.in_step(pool.div(pool.int(2), concentration));
        let two = self.builder.number(2.0);
        let exponent = self.builder.mul(less, current);
        let ratio = UnaryOp::of(Function::Expm1Ratio).expect("a function of one argument");
        let ratio = self.builder.unary(ratio, exponent);
        let fall = self.builder.mul(exponent, ratio);
        let uniform = self.own_uniform(step.state, "direction");
        let z = self.builder.mul(uniform, fall);
        let below = self.builder.add(two, z);
        let quotient = self.builder.div(z, below);
        let half = self.builder.unary(UnaryOp::Atanh, quotient);
        let component = self.builder.mul_add(reach, half, current);
        // Rounding must not lead beyond the sphere.
        let opposite = self.builder.unary(UnaryOp::Neg, current);
        self.builder.binary(BinaryOp::Max, component, opposite)
    }
}
