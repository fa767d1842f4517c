//! A simulator whose paths fail in every way.

use std::borrow::Cow;

use driftwright_runtime::random::Draws;
use driftwright_runtime::{Arith, LANES, Lane, Shape, Simulator, Source, StepError, math};

use crate::models::shape;

/// Brownian motion from 1 that observes its logarithm (not a number below 0) and a flag,
/// raised once it has been above 2. Steps longer than 32 are refused.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Fragile;

static SOURCES: [Source; 1] = [Source::new("B")];
static OUTPUTS: [Cow<'static, str>; 2] = [Cow::Borrowed("log_X"), Cow::Borrowed("out")];

impl Simulator for Fragile {
    fn shape(&self) -> Shape<'_> {
        Shape {
            states: 2,
            step_scratch: 1,
            observation_values: 1,
            left_domain: Some(1),
            time_dependent: true,
            approximate: true,
            ..shape(&SOURCES, &OUTPUTS)
        }
    }

    fn start(&self, states: &mut [f64]) {
        states.copy_from_slice(&[1.0, 0.0]);
    }

    fn step_values(&self, _start: f64, length: f64, values: &mut [f64]) -> Result<(), StepError> {
        values[0] = length.sqrt();
        if length <= 32.0 {
            return Ok(());
        }
        let name = "the volatility".into();
        let value = f64::INFINITY;
        Err(StepError::NotFinite { name, value })
    }

    fn observation_values(&self, time: f64, values: &mut [f64]) -> Result<(), StepError> {
        values[0] = time;
        Ok(())
    }

    #[inline(always)]
    fn step<A: Arith>(
        &self,
        values: &[f64],
        states: &mut [Lane],
        noise: &[Lane],
        _draws: &Draws,
        scratch: &mut [Lane],
    ) {
        let [x, flag] = states else {
            unreachable!("two states")
        };
        for i in 0..LANES {
            scratch[0][i] = values[0] * noise[0][i];
            x[i] += scratch[0][i];
            flag[i] = if x[i] > 2.0 { 1.0 } else { flag[i] };
        }
    }

    #[inline(always)]
    fn observe<A: Arith>(
        &self,
        values: &[f64],
        states: &[Lane],
        outputs: &mut [Lane],
        _scratch: &mut [Lane],
    ) {
        assert!(values[0] > 0.0);
        for i in 0..LANES {
            outputs[0][i] = math::ln::<A>(states[0][i]);
            outputs[1][i] = states[1][i];
        }
    }
}
