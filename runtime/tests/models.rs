//! Hand-written simulators for the tests and benchmarks.

use std::borrow::Cow;

use driftwright_runtime::random::Draws;
use driftwright_runtime::{Arith, LANES, Lane, Shape, Simulator, Source, StepError, math};

/// Geometric Brownian motion, `dS = mu S dt + sigma S dW`, stepped exactly in its logarithm.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Geometric {
    pub(crate) start: f64,
    pub(crate) mu: f64,
    pub(crate) sigma: f64,
}

/// The model most tests run.
pub(crate) const ORCHARD: Geometric = Geometric {
    start: 42.0,
    mu: 0.05,
    sigma: 0.2,
};

/// The shape of a model of one state with one value a step, no scratch and no observation values.
pub(crate) fn shape<'a>(sources: &'a [Source], outputs: &'a [Cow<'static, str>]) -> Shape<'a> {
    Shape {
        states: 1,
        step_values: 1,
        step_scratch: 0,
        sources,
        outputs,
        observation_values: 0,
        observation_scratch: 0,
        left_domain: None,
        time_dependent: false,
        approximate: false,
    }
}

static SOURCES: [Source; 1] = [Source::new("W")];
static OUTPUTS: [Cow<'static, str>; 2] = [Cow::Borrowed("S"), Cow::Borrowed("log_S")];

impl Simulator for Geometric {
    fn shape(&self) -> Shape<'_> {
        Shape {
            step_values: 2,
            ..shape(&SOURCES, &OUTPUTS)
        }
    }

    fn start(&self, states: &mut [f64]) {
        states[0] = self.start.ln();
    }

    fn step_values(&self, _start: f64, length: f64, values: &mut [f64]) -> Result<(), StepError> {
        values[0] = (self.mu - 0.5 * self.sigma * self.sigma) * length;
        values[1] = self.sigma * length.sqrt();
        Ok(())
    }

    fn observation_values(&self, _time: f64, _values: &mut [f64]) -> Result<(), StepError> {
        Ok(())
    }

    #[inline(always)]
    fn step<A: Arith>(
        &self,
        values: &[f64],
        states: &mut [Lane],
        noise: &[Lane],
        _draws: &Draws,
        _scratch: &mut [Lane],
    ) {
        let [x] = states else {
            unreachable!("one state")
        };
        let [z] = noise else {
            unreachable!("one source")
        };
        for i in 0..LANES {
            x[i] = A::mul_add(values[1], z[i], x[i] + values[0]);
        }
    }

    #[inline(always)]
    fn observe<A: Arith>(
        &self,
        _values: &[f64],
        states: &[Lane],
        outputs: &mut [Lane],
        _scratch: &mut [Lane],
    ) {
        let [price, log] = outputs else {
            unreachable!("two outputs")
        };
        for i in 0..LANES {
            price[i] = math::exp::<A>(states[0][i]);
            log[i] = states[0][i];
        }
    }
}
