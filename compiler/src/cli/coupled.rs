//! A model stepped once, or at two step lengths along the same Brownian paths.
//!
//! The difference of the two samples estimates the bias of discretisation with little noise: the error
//! of weak order p is C h^p to leading order, so that the step h is off by the difference to h/2,
//! divided by 1 - 2^-p (Talay and Tubaro 1990, "Expansion of the global error for numerical schemes
//! solving stochastic differential equations").
//!
//! Both cases are one type with one place each at which the model is stepped and observed: a driver is
//! compiled for every instruction set and arithmetic class, and every place more is paid that often.

use std::borrow::Cow;

use driftwright_runtime::random::Draws;
use driftwright_runtime::{Arith, Grid, Lane, Shape, Simulator, StepError};

/// One copy of a simulator, or two: one that takes the steps of a grid, and one that takes each in two
/// halves. The long step's normal numbers are the scaled sums of the two halves'; its draws from other laws
/// are those of the second half, each copy's with parameters of its own.
///
/// Outputs: those of the long steps, then those of the halves.
pub(super) struct Coupled<'a, S> {
    inner: &'a S,
    halves: Option<Halves>,
    outputs: Vec<Cow<'static, str>>,
}

/// How half steps make up long ones.
struct Halves {
    /// Start of each half step, in order; halves 2k and 2k+1 make up the long step k.
    starts: Vec<f64>,
    /// Start and length of each long step.
    long: Vec<(f64, f64)>,
}

impl<'a, S: Simulator> Coupled<'a, S> {
    /// The simulator as it is.
    pub(super) fn single(inner: &'a S) -> Self {
        Self {
            inner,
            halves: None,
            outputs: inner.shape().outputs.to_vec(),
        }
    }

    /// Couples the steps of a grid with their halves. The pair runs on `grid.halved()`.
    pub(super) fn pair(inner: &'a S, grid: &Grid) -> Self {
        let names = inner.shape().outputs;
        let halves = Halves {
            starts: grid.halved().steps().iter().map(|s| s.start).collect(),
            long: grid.steps().iter().map(|s| (s.start, s.length)).collect(),
        };
        Self {
            inner,
            halves: Some(halves),
            outputs: names.iter().chain(names).cloned().collect(),
        }
    }

    fn copies(&self) -> usize {
        if self.halves.is_some() { 2 } else { 1 }
    }
}

impl<S: Simulator> Simulator for Coupled<'_, S> {
    fn shape(&self) -> Shape<'_> {
        let inner = self.inner.shape();
        let coupled = self.halves.is_some();
        Shape {
            // Long steps, halves, and the first half's normal numbers.
            states: self.copies() * inner.states + if coupled { inner.sources.len() } else { 0 },
            // Which half it is, and the values of the half and of the long step.
            step_values: self.copies() * inner.step_values + usize::from(coupled),
            outputs: &self.outputs,
            time_dependent: inner.time_dependent || coupled,
            ..inner
        }
    }

    fn start(&self, states: &mut [f64]) {
        states.fill(0.0);
        for copy in states
            .chunks_exact_mut(self.inner.shape().states)
            .take(self.copies())
        {
            self.inner.start(copy);
        }
    }

    fn step_values(&self, start: f64, length: f64, values: &mut [f64]) -> Result<(), StepError> {
        let Some(Halves { starts, long }) = &self.halves else {
            return self.inner.step_values(start, length, values);
        };
        let half = starts.partition_point(|s| *s < start);
        let (long_start, long_length) = long[(half / 2).min(long.len() - 1)];
        let count = self.inner.shape().step_values;
        values[2 * count] = (half % 2) as f64;
        self.inner
            .step_values(long_start, long_length, &mut values[..count])?;
        self.inner
            .step_values(start, length, &mut values[count..2 * count])
    }

    fn observation_values(&self, time: f64, values: &mut [f64]) -> Result<(), StepError> {
        self.inner.observation_values(time, values)
    }

    #[inline(always)]
    fn step<A: Arith>(
        &self,
        values: &[f64],
        states: &mut [Lane],
        noise: &[Lane],
        draws: &Draws,
        scratch: &mut [Lane],
    ) {
        let shape = self.inner.shape();
        let (copies, held) = states.split_at_mut(self.copies() * shape.states);
        let second = held.is_empty() || values[2 * shape.step_values] != 0.0;
        for (sum, lane) in held.iter_mut().zip(noise) {
            for (a, b) in sum.0.iter_mut().zip(&lane.0) {
                *a = if second {
                    (*a + *b) * std::f64::consts::FRAC_1_SQRT_2
                } else {
                    *b
                };
            }
        }
        let first = if second { 0 } else { 1 };
        for copy in first..self.copies() {
            let noise = if copy == 0 && !held.is_empty() {
                &*held
            } else {
                noise
            };
            let values = &values[copy * shape.step_values..][..shape.step_values];
            let states = &mut copies[copy * shape.states..][..shape.states];
            self.inner.step::<A>(values, states, noise, draws, scratch);
        }
    }

    #[inline(always)]
    fn observe<A: Arith>(
        &self,
        values: &[f64],
        states: &[Lane],
        outputs: &mut [Lane],
        scratch: &mut [Lane],
    ) {
        let shape = self.inner.shape();
        let copies = states.chunks_exact(shape.states).take(self.copies());
        for (states, outputs) in copies.zip(outputs.chunks_exact_mut(shape.outputs.len())) {
            self.inner.observe::<A>(values, states, outputs, scratch);
        }
    }
}
