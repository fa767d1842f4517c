//! Exact steps of linear Gaussian systems.

use std::collections::{BTreeMap, BTreeSet};

use super::Lowering;
use super::noise::{Mixture, Noise, Normal, Transition};
use super::rows::{elapsed, is_decoupled};
use crate::program::op::ValueId;
use crate::scheme::{Component, Group, LinearGaussian, RowNoise};

impl Lowering<'_> {
    /// `u(t + h) = e u(t) + shift + Gaussian part`, row by row.
    pub(super) fn exact_group(
        &mut self,
        index: usize,
        group: &Group,
        system: &LinearGaussian,
        noise: &Noise,
        next: &mut BTreeMap<usize, ValueId>,
    ) {
        let transition = if is_decoupled(self, system) {
            None
        } else {
            let known = noise.transitions.get(&index).copied();
            Some(known.unwrap_or_else(|| Noise::noise_free(self, system)))
        };
        for (row, &state) in group.states.iter().enumerate() {
            let mixture = self.row_noise(index, state, system, row, noise);
            let value = match transition {
                None => self.decoupled_row(state, system, row, &mixture),
                Some(transition) => self.coupled_row(group, system, row, transition, &mixture),
            };
            let text = self.equation_text(state, "stepped exactly");
            self.note(state, value, text);
            next.insert(state, value);
        }
    }

    fn row_noise(
        &mut self,
        group: usize,
        state: usize,
        system: &LinearGaussian,
        row: usize,
        noise: &Noise,
    ) -> Mixture {
        let place = |component| {
            self.plan
                .noise
                .position(component)
                .expect("the plan lists every component it uses")
        };
        let mixture = match system.noise[row] {
            RowNoise::None => return Vec::new(),
            RowNoise::Convolution => noise
                .mixture(place(Component::Convolution { group, state }))
                .clone(),
            RowNoise::Increments => {
                let mut weights = Vec::new();
                for (driver, &coefficient) in system.c[row].iter().enumerate() {
                    if !self.model.pool.is_zero_literal(coefficient) {
                        weights.push((place(Component::Increment { driver }), coefficient));
                    }
                }
                let weights: Vec<(usize, ValueId)> = weights
                    .into_iter()
                    .map(|(place, c)| (place, self.in_step(c)))
                    .collect();
                noise.combine(self, &weights)
            }
        };
        self.name_mixture(state, &mixture);
        mixture
    }

    fn name_mixture(&mut self, state: usize, mixture: &Mixture) {
        let name = &self.model.states[state].name;
        for &(normal, coefficient) in mixture {
            let coordinate = self.coordinate_text(state);
            let source = |component: usize| &self.plan.noise.components[component].source;
            let (source, text) = match normal {
                Normal::Source(component) => {
                    let source = source(component);
                    let text = format!(
                        "Standard deviation that the normal draw `{source}` gives {coordinate} over a step."
                    );
                    (source, text)
                }
                // The whole standard deviation is in the factor of the correlated draws.
                Normal::Mixed(..) if self.builder.constant_value(coefficient).is_some() => continue,
                Normal::Mixed(component, _) => {
                    let source = source(component);
                    let text = format!(
                        "Factor of the correlated draw `{source}` in {coordinate} over a step."
                    );
                    (source, text)
                }
            };
            self.builder
                .hint(coefficient, format!("deviation_{name}_{source}"));
            self.note(state, coefficient, text);
        }
    }

    /// A row that reads no other row.
    fn decoupled_row(
        &mut self,
        state: usize,
        system: &LinearGaussian,
        row: usize,
        mixture: &Mixture,
    ) -> ValueId {
        let pool = self.model.pool.clone();
        let (rate, alpha) = (system.a[row][row], system.alpha[row]);
        let name = &self.model.states[state].name;
        let shift = if pool.is_zero_literal(alpha) {
            None
        } else {
            let drift = self.in_step(alpha);
            self.builder.hint(drift, format!("drift_{name}"));
            let shift = self.in_step(pool.mul(alpha, elapsed(self, rate)));
            self.builder.hint(shift, format!("shift_{name}"));
            let text = format!(
                "Constant part of the drift of {}: {}.",
                self.coordinate_text(state),
                pool.format(alpha)
            );
            self.note(state, drift, text);
            let text = format!(
                "What the constant drift adds to {} over a step.",
                self.coordinate_text(state)
            );
            self.note(state, shift, text);
            Some(shift)
        };
        let part = self.gaussian_part(shift, mixture);
        let current = self.current(state);
        if pool.is_zero_literal(rate) {
            return part.map_or(current, |part| self.builder.add(current, part));
        }
        let decay = self.in_step(pool.exp(pool.mul(rate, self.length())));
        self.builder.hint(decay, format!("decay_{name}"));
        let text = format!(
            "What is left of {} after a step at the rate {}.",
            self.coordinate_text(state),
            pool.format(rate)
        );
        self.note(state, decay, text);
        match part {
            Some(part) => self.builder.mul_add(decay, current, part),
            None => self.builder.mul(decay, current),
        }
    }

    /// A row of a system whose rows read one another: coefficients out of the matrix exponential.
    fn coupled_row(
        &mut self,
        group: &Group,
        system: &LinearGaussian,
        row: usize,
        transition: Transition,
        mixture: &Mixture,
    ) -> ValueId {
        let Transition {
            matrix,
            dim,
            offset,
        } = transition;
        let reached = self.reached(system, row);
        let name =
            |lowering: &Self, place: usize| lowering.model.states[group.states[place]].name.clone();
        let own = name(self, row);
        let shifted = reached
            .iter()
            .any(|&k| !self.model.pool.is_zero_literal(system.alpha[k]));
        let shift = shifted.then(|| {
            let shift = self.builder.extract(matrix, dim * dim + offset + row);
            self.builder.hint(shift, format!("shift_{own}"));
            shift
        });
        let mut total = self.gaussian_part(shift, mixture);
        for place in reached {
            let entry = self
                .builder
                .extract(matrix, (offset + row) * dim + offset + place);
            let of = name(self, place);
            self.builder.hint(entry, format!("transition_{own}_{of}"));
            let current = self.current(group.states[place]);
            total = Some(match total {
                Some(total) => self.builder.mul_add(entry, current, total),
                None => self.builder.mul(entry, current),
            });
        }
        total.expect("a row reaches itself")
    }

    /// The rows a row depends on, itself included, over any number of steps through the drift matrix.
    fn reached(&self, system: &LinearGaussian, row: usize) -> BTreeSet<usize> {
        let mut reached = BTreeSet::from([row]);
        let mut stack = vec![row];
        while let Some(i) = stack.pop() {
            for (k, &entry) in system.a[i].iter().enumerate() {
                if !self.model.pool.is_zero_literal(entry) && reached.insert(k) {
                    stack.push(k);
                }
            }
        }
        reached
    }

    /// `shift + sum_k coefficient_k Z_k`.
    pub(super) fn gaussian_part(
        &mut self,
        shift: Option<ValueId>,
        mixture: &Mixture,
    ) -> Option<ValueId> {
        let mut total = shift;
        for &(normal, coefficient) in mixture {
            let draw = match normal {
                Normal::Source(source) => self.draw(source),
                Normal::Mixed(_, value) => value,
            };
            total = Some(match total {
                Some(total) => self.builder.mul_add(coefficient, draw, total),
                None => self.builder.mul(coefficient, draw),
            });
        }
        total
    }

    /// A source's standard normal draw.
    pub(super) fn draw(&mut self, source: usize) -> ValueId {
        let draw = self.builder.noise(source);
        self.builder.hint(
            draw,
            format!("draw_{}", self.plan.noise.components[source].source),
        );
        draw
    }

    /// The equation of a state's coordinate and what becomes of it.
    pub(super) fn equation_text(&self, state: usize, what: &str) -> String {
        let pool = &self.model.pool;
        let coordinate = &self.plan.coordinates[state];
        let drift = pool.format(coordinate.process.drift);
        let mut text = format!("d({}) = ({drift}) dt", self.coordinate_text(state));
        for (driver, &b) in self.model.drivers.iter().zip(&coordinate.process.diffusion) {
            if !pool.is_zero_literal(b) {
                text.push_str(&format!(" + ({}) d{}", pool.format(b), driver.name));
            }
        }
        format!("{text}, {what}.")
    }
}
