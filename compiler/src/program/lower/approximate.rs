//! One-step schemes on the drivers' increments, the closed ends of domains, and the flag of paths that
//! have left theirs.

use super::Lowering;
use super::noise::Noise;
use crate::program::Slot;
use crate::program::builder::Phase;
use crate::program::formula::Formulas;
use crate::program::functions::UnaryOp;
use crate::program::op::{Comparison, ValueId};
use crate::scheme::{Component, EdgeRule, StateStep, Taylor};
use crate::symbolic::{Bound, Expr};

impl Lowering<'_> {
    /// `u + a h + sum b_j dW_j + sum c_jk (dW_j dW_k - rho_jk h) + sum d_jk A_jk` and terms of higher order, kept at its
    /// closed ends; the drift of a tamed scheme is `a h/(1 + h size)`.
    pub(super) fn approximate_state(&mut self, step: &StateStep, noise: &Noise) -> ValueId {
        let pool = self.model.pool.clone();
        let coordinate = &self.plan.coordinates[step.state];
        let length = self.length();
        let drift = match step.taming {
            _ if step.implicit.is_some() => pool.zero(),
            None => pool.mul(step.drift, length),
            Some(size) => {
                let held = pool.add(pool.one(), pool.mul(length, size));
                pool.div(pool.mul(step.drift, length), held)
            }
        };
        let mut value = self.in_step(pool.add(pool.var(coordinate.symbol), drift));
        let when = match step.implicit {
            Some(_) => "at its end",
            None => "over a step",
        };
        let drift = format!(
            "Drift of {}, {}, {when}.",
            self.coordinate_text(step.state),
            pool.format(step.drift)
        );
        if step.implicit.is_none() {
            self.note(step.state, value, drift.clone());
        }
        value = self.diffusion_terms(step, noise, value);
        if let Some(implicit) = &step.implicit {
            value = self.implicit_value(step, implicit, value);
            self.note(step.state, value, drift);
        }
        value = self.milstein_terms(step, noise, value);
        value = self.area_terms(step, noise, value);
        if let Some(taylor) = &step.taylor {
            value = self.taylor_terms(step.state, taylor, noise, value);
        }
        let scheme = self.plan.groups[self.plan.group_of(step.state)]
            .scheme
            .name();
        let text = self.equation_text(step.state, &format!("stepped by {scheme}"));
        value = self.at_edges(step, value);
        self.note(step.state, value, text);
        value
    }

    /// The drivers' increments with the same coefficient on every path are mixed before the paths are
    /// looked at; the others are multiplied on each path.
    fn diffusion_terms(&mut self, step: &StateStep, noise: &Noise, value: ValueId) -> ValueId {
        let mut uniform = Vec::new();
        let mut varying = Vec::new();
        for (driver, &coefficient) in step.diffusion.iter().enumerate() {
            if self.model.pool.is_zero_literal(coefficient) {
                continue;
            }
            let id = self.in_step(coefficient);
            if self.builder.is_lane(id) {
                varying.push((driver, id));
            } else {
                uniform.push((self.component(driver), id));
            }
        }
        let mixture = noise.combine(self, &uniform);
        let mut value = self
            .gaussian_part(Some(value), &mixture)
            .expect("starts from a value");
        for (driver, coefficient) in varying {
            let increment = self.increment(driver, noise);
            value = self.builder.mul_add(coefficient, increment, value);
            let text = format!(
                "Diffusion of {} by {}: {}.",
                self.coordinate_text(step.state),
                self.model.drivers[driver].name,
                self.model.pool.format(step.diffusion[driver])
            );
            self.note(step.state, value, text);
        }
        value
    }

    fn milstein_terms(&mut self, step: &StateStep, noise: &Noise, mut value: ValueId) -> ValueId {
        let pool = self.model.pool.clone();
        for &(j, k, coefficient) in &step.milstein {
            let expected = pool.mul(self.model.correlation[j][k], self.length());
            let expected = self.in_step(pool.neg(expected));
            let (first, second) = (self.increment(j, noise), self.increment(k, noise));
            let deviation = self.builder.mul_add(first, second, expected);
            let factor = self.in_step(coefficient);
            value = self.builder.mul_add(factor, deviation, value);
            let text = format!(
                "Milstein's term of {} for {} and {}: {}.",
                self.coordinate_text(step.state),
                self.model.drivers[j].name,
                self.model.drivers[k].name,
                pool.format(coefficient)
            );
            self.note(step.state, value, text);
        }
        value
    }

    fn area_terms(&mut self, step: &StateStep, noise: &Noise, mut value: ValueId) -> ValueId {
        for &(j, k, coefficient) in &step.areas {
            let factor = self.in_step(coefficient);
            value = self.builder.mul_add(factor, noise.areas[&(j, k)], value);
            let text = format!(
                "Levy area term of {} for {} and {}: {}.",
                self.coordinate_text(step.state),
                self.model.drivers[j].name,
                self.model.drivers[k].name,
                self.model.pool.format(coefficient)
            );
            self.note(step.state, value, text);
        }
        value
    }

    /// `L^0 a h^2/2 + sum_j (L^j a dZ_j + L^0 b^j (h dW_j - dZ_j)) + L^j L^j b^j (dW_j^2/3 - h) dW_j/2`.
    fn taylor_terms(
        &mut self,
        state: usize,
        taylor: &Taylor,
        noise: &Noise,
        value: ValueId,
    ) -> ValueId {
        let pool = self.model.pool.clone();
        let half_square = pool.mul(pool.ratio(1, 2), pool.square(self.length()));
        let (length, half_square) = (self.in_step(self.length()), self.in_step(half_square));
        let curvature = self.in_step(taylor.drift);
        let mut value = self.builder.mul_add(half_square, curvature, value);
        for &(driver, along, moved) in &taylor.mixed {
            let increment = self.increment(driver, noise);
            let integral = self.integral(driver, increment, noise);
            let (along, moved) = (self.in_step(along), self.in_step(moved));
            value = self.builder.mul_add(along, integral, value);
            let whole = self.builder.mul(length, increment);
            let rest = self.builder.sub(whole, integral);
            value = self.builder.mul_add(moved, rest, value);
        }
        if let Some((driver, coefficient)) = taylor.cubic {
            let increment = self.increment(driver, noise);
            let third = self.builder.number(1.0 / 3.0);
            let square = self.builder.mul(increment, increment);
            let minus = self.builder.neg(length);
            let deviation = self.builder.mul_add(third, square, minus);
            let half = self.in_step(pool.mul(pool.ratio(1, 2), coefficient));
            let product = self.builder.mul(half, increment);
            value = self.builder.mul_add(product, deviation, value);
        }
        let text = format!("Terms of order 1.5 of {}.", self.coordinate_text(state));
        self.note(state, value, text);
        value
    }

    /// The integral of a driver over the step, less its value at the start: `h (dW + dV/sqrt(3))/2`.
    fn integral(&mut self, driver: usize, increment: ValueId, noise: &Noise) -> ValueId {
        let place = self.plan.noise.position(Component::Companion { driver });
        let mixture = noise
            .mixture(place.expect("the plan lists every companion"))
            .clone();
        let companion = self
            .gaussian_part(None, &mixture)
            .expect("a companion has a source");
        let root = self.builder.number(1.0 / 3.0_f64.sqrt());
        let sum = self.builder.mul_add(root, companion, increment);
        let half = self.in_step(
            self.model
                .pool
                .mul(self.model.pool.ratio(1, 2), self.length()),
        );
        let integral = self.builder.mul(half, sum);
        self.builder.hint(
            integral,
            format!("integral_{}", self.model.drivers[driver].name),
        );
        integral
    }

    pub(super) fn component(&self, driver: usize) -> usize {
        self.plan
            .noise
            .position(Component::Increment { driver })
            .expect("the plan lists every increment it uses")
    }

    /// The increment of a driver over the step, on each path.
    pub(super) fn increment(&mut self, driver: usize, noise: &Noise) -> ValueId {
        let component = self.component(driver);
        let mixture = noise.mixture(component).clone();
        let increment = self
            .gaussian_part(None, &mixture)
            .expect("an increment has a source");
        self.builder.hint(
            increment,
            format!("increment_{}", self.model.drivers[driver].name),
        );
        increment
    }

    /// Reflection first: what a long step throws across the whole domain is then stopped at the other end.
    fn at_edges(&mut self, step: &StateStep, mut value: ValueId) -> ValueId {
        let current = self.current(step.state);
        let rules = [(step.lower, false), (step.upper, true)];
        for (rule, upper) in rules {
            if let Some(EdgeRule::Reflect { end }) = rule {
                value = self.reflected(value, end, upper);
            }
        }
        if let (Some(EdgeRule::Reflect { end }), Some(EdgeRule::Reflect { .. })) =
            (step.lower, step.upper)
        {
            let end = self.in_step(end);
            value = self.beyond(value, end, false, (end, value));
        }
        for (rule, upper) in rules {
            if let Some(EdgeRule::Absorb { end }) = rule {
                let end = self.in_step(end);
                let stopped = self.beyond(value, end, upper, (end, value));
                value = self.beyond(current, end, upper, (end, stopped));
            }
        }
        value
    }

    /// `then` where `value` is at or beyond `end`, else `otherwise`.
    fn beyond(
        &mut self,
        value: ValueId,
        end: ValueId,
        upper: bool,
        (then, otherwise): (ValueId, ValueId),
    ) -> ValueId {
        let sides = if upper { (end, value) } else { (value, end) };
        self.builder
            .select(Comparison::LessEqual, sides, then, otherwise)
    }

    fn reflected(&mut self, value: ValueId, end: Expr, upper: bool) -> ValueId {
        let end = self.in_step(end);
        let inward = if upper {
            self.builder.sub(end, value)
        } else {
            self.builder.sub(value, end)
        };
        let distance = self.builder.unary(UnaryOp::Abs, inward);
        if upper {
            self.builder.sub(end, distance)
        } else {
            self.builder.add(end, distance)
        }
    }

    /// A slot that turns 1 when a state leaves its domain, and stays so.
    pub(super) fn domain_flag(&mut self, slots: &mut Vec<Slot>) -> Option<usize> {
        let slot = slots.len();
        let current = self.builder.state(slot, Phase::Step);
        let mut flag = current;
        for (state, next) in slots.iter().map(|s| s.next).enumerate() {
            let group = &self.plan.groups[self.plan.group_of(state)];
            if group.preserves_domain {
                continue;
            }
            let (value, range) = match self.plan.coordinates[state].image {
                Some(image) => (next, image),
                None => (
                    self.mapped_back(state, next),
                    self.model.states[state].domain,
                ),
            };
            flag = self.leaving(value, range.lower, false, flag);
            flag = self.leaving(value, range.upper, true, flag);
        }
        if flag == current {
            return None;
        }
        self.builder.hint(current, "left_domain");
        let initial = self.builder.number(0.0);
        slots.push(Slot {
            name: "left domain".to_owned(),
            coordinate: "1 once a state has left its domain".to_owned(),
            initial,
            next: flag,
        });
        Some(slot)
    }

    /// The state whose coordinate has a value at the end of a step.
    fn mapped_back(&mut self, state: usize, next: ValueId) -> ValueId {
        let coordinate = &self.plan.coordinates[state];
        let (start, length) = (self.builder.start(), self.builder.length());
        let end = self.builder.add(start, length);
        let mut environment = self.step_environment(end, [(coordinate.symbol, next)].into());
        let mut formulas = Formulas {
            pool: &self.model.pool,
            builder: &mut self.builder,
            environment: &mut environment,
        };
        formulas.lower(coordinate.inverse)
    }

    fn leaving(&mut self, value: ValueId, bound: Bound, upper: bool, flag: ValueId) -> ValueId {
        let (end, compare) = match bound {
            Bound::Infinite => return flag,
            Bound::Open(end) => (end, Comparison::LessEqual),
            Bound::Closed(end) => (end, Comparison::Less),
        };
        let end = self.in_step(end);
        let one = self.builder.number(1.0);
        let sides = if upper { (end, value) } else { (value, end) };
        self.builder.select(compare, sides, one, flag)
    }
}
