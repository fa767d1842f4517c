//! The equation of a drift-implicit step, `z - h a(z, t + h) = r`, whose left side rises in z.

use super::Lowering;
use crate::program::builder::Phase;
use crate::program::formula::{Environment, Formulas};
use crate::program::op::{Comparison, ValueId};
use crate::scheme::{Implicit, StateStep};
use crate::symbolic::Expr;

/// Newton's iterations. From anywhere within a factor of a thousand of the solution, ten halvings and then quadratic
/// convergence take no more.
const ITERATIONS: usize = 16;

/// The last two iterates differ by less than this, relatively, else the value is not a number: squared by one more iteration,
/// that is rounding.
const CLOSE: f64 = 1e-6;

impl Lowering<'_> {
    /// The coordinate z after a step, from `right`, the value before with the noise.
    pub(super) fn implicit_value(
        &mut self,
        step: &StateStep,
        implicit: &Implicit,
        right: ValueId,
    ) -> ValueId {
        match *implicit {
            Implicit::Quadratic {
                pole,
                constant,
                slope,
            } => self.quadratic_root(step, [pole, constant, slope], right),
            Implicit::Newton { slope } => self.newton_root(step, slope, right),
        }
    }

    /// The environment of the end of a step, where the state's own coordinate has a trial value.
    fn at_end_of_step(&mut self, state: usize, trial: Option<ValueId>) -> Environment {
        let (start, length) = (self.builder.start(), self.builder.length());
        let end = self.builder.add(start, length);
        let mut coordinates = self.coordinates(Phase::Step);
        if let Some(trial) = trial {
            coordinates.insert(self.plan.coordinates[state].symbol, trial);
        }
        self.step_environment(end, coordinates)
    }

    fn lower_in(&mut self, environment: &mut Environment, formula: Expr) -> ValueId {
        Formulas {
            pool: &self.model.pool,
            builder: &mut self.builder,
            environment,
        }
        .lower(formula)
    }

    /// The positive root of `(1 - h slope) z^2 - (r + h constant) z - h pole`, in the form that does not cancel.
    fn quadratic_root(
        &mut self,
        step: &StateStep,
        [pole, constant, slope]: [Expr; 3],
        right: ValueId,
    ) -> ValueId {
        let pool = self.model.pool.clone();
        let h = self.length();
        let mut end = self.at_end_of_step(step.state, None);
        let leading = pool.sub(pool.one(), pool.mul(h, slope));
        let leading = self.lower_in(&mut end, leading);
        let shift = self.lower_in(&mut end, pool.mul(h, constant));
        let pole = self.lower_in(&mut end, pool.mul(h, pole));
        let [zero, two, four] = [0.0, 2.0, 4.0].map(|n| self.builder.number(n));
        let middle = self.builder.add(right, shift);
        let product = self.builder.mul(leading, pole);
        let product = self.builder.mul(four, product);
        let square = self.builder.mul_add(middle, middle, product);
        let root = self.builder.sqrt(square);
        let sum = self.builder.add(middle, root);
        let twice = self.builder.mul(two, leading);
        let above = self.builder.div(sum, twice);
        let gap = self.builder.sub(root, middle);
        let twice = self.builder.mul(two, pole);
        let below = self.builder.div(twice, gap);
        self.builder
            .select(Comparison::LessEqual, (zero, middle), above, below)
    }

    /// The root by Newton's method, kept between the trial values that are known to lie on either side of it.
    fn newton_root(&mut self, step: &StateStep, slope: Expr, right: ValueId) -> ValueId {
        let pool = self.model.pool.clone();
        let range = pool.range(self.plan.coordinates[step.state].symbol);
        let [one, zero, half] = [1.0, 0.0, 0.5].map(|n| self.builder.number(n));
        let mut low = match range.lower.value() {
            Some(end) => self.in_step(end),
            None => self.builder.number(f64::MIN),
        };
        let mut high = match range.upper.value() {
            Some(end) => self.in_step(end),
            None => self.builder.number(f64::MAX),
        };
        let length = self.builder.length();
        let mut trial = self.current(step.state);
        let mut before = trial;
        for _ in 0..ITERATIONS {
            let mut end = self.at_end_of_step(step.state, Some(trial));
            let drift = self.lower_in(&mut end, step.drift);
            let slope = self.lower_in(&mut end, slope);
            let moved = self.builder.mul(length, drift);
            let left = self.builder.sub(trial, moved);
            let excess = self.builder.sub(left, right);
            let steep = self.builder.mul(length, slope);
            let steep = self.builder.sub(one, steep);
            low = self
                .builder
                .select(Comparison::Less, (excess, zero), trial, low);
            high = self
                .builder
                .select(Comparison::Less, (zero, excess), trial, high);
            let change = self.builder.div(excess, steep);
            let newton = self.builder.sub(trial, change);
            let [lower, upper] = [low, high].map(|end| {
                let sum = self.builder.add(end, trial);
                self.builder.mul(half, sum)
            });
            let kept = self
                .builder
                .select(Comparison::LessEqual, (newton, low), lower, newton);
            before = trial;
            trial = self
                .builder
                .select(Comparison::LessEqual, (high, newton), upper, kept);
        }
        self.settled(trial, before)
    }

    /// The last iterate, or not a number where it is far from the one before.
    fn settled(&mut self, last: ValueId, before: ValueId) -> ValueId {
        use crate::program::functions::UnaryOp::Abs;
        let [one, close, none] = [1.0, CLOSE, f64::NAN].map(|n| self.builder.number(n));
        let difference = self.builder.sub(last, before);
        let difference = self.builder.unary(Abs, difference);
        let size = self.builder.unary(Abs, last);
        let size = self.builder.add(one, size);
        let allowed = self.builder.mul(close, size);
        self.builder
            .select(Comparison::LessEqual, (difference, allowed), last, none)
    }
}
