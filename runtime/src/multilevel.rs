//! Coupled paths for multilevel estimators: a fine path, its antithetic twin and a coarse path on the same Brownian motion.
//!
//! A multilevel estimator (Giles 2008) sums means of differences between a level and the one with steps twice as long. The variance
//! of the difference of a smooth payoff falls with the square of the step where the scheme has strong order 1, with the
//! step itself where it has 1/2. For noise that does not commute Milstein's scheme without Levy areas has order 1/2, and yet the
//! mean of a payoff on the fine path and on its antithetic twin, in which the increments of the two halves of each
//! coarse step change places, less that on the coarse path has a variance of the order of the step squared (Giles and
//! Szpruch 2014).

use std::borrow::Cow;

use crate::arith::Arith;
use crate::error::StepError;
use crate::fact::Fact;
use crate::lane::{LANES, Lane};
use crate::random::Draws;
use crate::simulator::{Shape, Simulator};
use crate::source::Source;

/// What [`Coupled`] observes of each quantity.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Role {
    /// On the fine path, two steps to each of the grid.
    Fine,
    /// On its antithetic twin.
    Antithetic,
    /// On the coarse path, one step to each of the grid.
    Coarse,
    /// Fine less coarse: what a level of the plain estimator averages.
    Difference,
    /// The mean of fine and antithetic less coarse: what a level of the antithetic estimator averages.
    Correction,
}

impl Role {
    /// All of them, in the order of the outputs.
    pub const ALL: [Role; 5] = [
        Role::Fine,
        Role::Antithetic,
        Role::Coarse,
        Role::Difference,
        Role::Correction,
    ];

    fn name(self) -> &'static str {
        match self {
            Role::Fine => "fine",
            Role::Antithetic => "antithetic",
            Role::Coarse => "coarse",
            Role::Difference => "difference",
            Role::Correction => "correction",
        }
    }
}

/// A simulator whose paths are three of another's, coupled. Its grid is that of the coarse path.
///
/// Each of the three has the law of the other simulator on its grid, whatever the model. They are close where
/// all randomness comes from increments of drivers, and from their integrals in the strong Taylor scheme; the normal
/// part of an exact law is coupled up to a term of order 3/2 a step. Draws from other laws and Levy areas are
/// independent between the fine and the coarse path, so that the difference of states that need them does not
/// shrink.
///
/// ```
/// use driftwright_runtime::multilevel::{Coupled, Role};
/// # use std::borrow::Cow;
/// # use driftwright_runtime::{Arith, LANES, Lane, Shape, Simulator, Source, StepError, random::Draws};
/// # /// Euler's scheme for dX = s X dW.
/// # struct Euler(f64);
/// # static SOURCES: [Source; 1] = [Source::new("W")];
/// # static OUTPUTS: [Cow<'static, str>; 1] = [Cow::Borrowed("X")];
/// # impl Simulator for Euler {
/// #     fn shape(&self) -> Shape<'_> {
/// #         Shape {
/// #             states: 1, step_values: 1, step_scratch: 0, sources: &SOURCES, outputs: &OUTPUTS,
/// #             observation_values: 0, observation_scratch: 0, left_domain: None,
/// #             time_dependent: false, approximate: true,
/// #         }
/// #     }
/// #     fn start(&self, states: &mut [f64]) { states[0] = 1.0; }
/// #     fn step_values(&self, _: f64, h: f64, values: &mut [f64]) -> Result<(), StepError> {
/// #         values[0] = self.0 * h.sqrt();
/// #         Ok(())
/// #     }
/// #     fn observation_values(&self, _: f64, _: &mut [f64]) -> Result<(), StepError> { Ok(()) }
/// #     #[inline(always)]
/// #     fn step<A: Arith>(
/// #         &self, values: &[f64], x: &mut [Lane], noise: &[Lane], _: &Draws, _: &mut [Lane],
/// #     ) {
/// #         for i in 0..LANES { x[0][i] += values[0] * noise[0][i] * x[0][i]; }
/// #     }
/// #     #[inline(always)]
/// #     fn observe<A: Arith>(&self, _: &[f64], x: &[Lane], outputs: &mut [Lane], _: &mut [Lane]) {
/// #         outputs[0] = x[0];
/// #     }
/// # }
/// use driftwright_runtime::{Grid, Run, collect::Moments, simulate};
/// let level = |steps| {
///     let simulator = Euler(0.5);
///     let coupled = Coupled::new(&simulator);
///     let grid = Grid::new(&[1.0], Some(steps)).unwrap();
///     let run = Run { paths: 20_000, ..Run::default() };
///     let moments = simulate(&coupled, &grid, &run, Moments).unwrap().output;
///     moments[0][coupled.output(Role::Difference, 0)].variance()
/// };
/// // Strong order 1/2: half the step, half the variance.
/// assert!((level(64) / level(128) - 2.0).abs() < 0.2);
/// ```
#[derive(Debug)]
pub struct Coupled<'a, S> {
    simulator: &'a S,
    sources: Vec<Source>,
    outputs: Vec<Cow<'static, str>>,
    mixing: Vec<Mixing>,
}

/// How a normal of a coarse step comes out of those of its halves.
#[derive(Clone, Copy, Debug)]
enum Mixing {
    /// `(a + b)/sqrt(2)`.
    Sum,
    /// The companion of a driver's increment in its integral over the step, `h (dW + dV/sqrt(3))/2`, with the place of the
    /// driver: `sqrt(3/8) (a - b)` of the driver's normals and `sqrt(1/8) (a + b)` of its own.
    Companion(usize),
}

/// One of the five steps that make up a step.
struct Move {
    path: usize,
    values: usize,
    noise: Noise,
    draws: Draws,
}

#[derive(Clone, Copy)]
enum Noise {
    First,
    Second,
    Mixed,
}

impl<'a, S: Simulator> Coupled<'a, S> {
    /// Three coupled paths of a simulator in one.
    #[must_use]
    pub fn new(simulator: &'a S) -> Self {
        let shape = simulator.shape();
        let half = |half: &'static str| {
            let names = shape.sources.iter().map(|s| &s.name);
            names.map(move |name| Source::named(format!("{half}:{name}")))
        };
        let driver_of = |source: &Source| {
            let driver = source.name.strip_prefix("integral:")?;
            shape.sources.iter().position(|s| s.name == driver)
        };
        let mixing = shape.sources.iter().map(|source| match driver_of(source) {
            Some(driver) => Mixing::Companion(driver),
            None => Mixing::Sum,
        });
        let named = |role: Role| {
            let names = shape.outputs.iter();
            names.map(move |name| Cow::Owned(format!("{name} {}", role.name())))
        };
        Coupled {
            simulator,
            sources: half("first").chain(half("second")).collect(),
            outputs: Role::ALL.into_iter().flat_map(named).collect(),
            mixing: mixing.collect(),
        }
    }

    /// The place among the outputs of what is observed of the quantity with number `quantity`.
    #[must_use]
    pub fn output(&self, role: Role, quantity: usize) -> usize {
        role as usize * self.quantities() + quantity
    }

    fn quantities(&self) -> usize {
        self.outputs.len() / Role::ALL.len()
    }
}

impl<S: Simulator> Simulator for Coupled<'_, S> {
    fn shape(&self) -> Shape<'_> {
        let shape = self.simulator.shape();
        Shape {
            // The last slot of all is the flag of a left domain.
            states: 3 * shape.states + 1,
            step_values: 3 * shape.step_values,
            step_scratch: shape.step_scratch + shape.sources.len(),
            sources: &self.sources,
            outputs: &self.outputs,
            left_domain: shape.left_domain.map(|_| 3 * shape.states),
            ..shape
        }
    }

    fn start(&self, states: &mut [f64]) {
        let count = self.simulator.shape().states;
        states.fill(0.0);
        for path in 0..3 {
            self.simulator.start(&mut states[path * count..][..count]);
        }
    }

    fn step_values(&self, start: f64, length: f64, values: &mut [f64]) -> Result<(), StepError> {
        let count = self.simulator.shape().step_values;
        let half = 0.5 * length;
        let steps = [(start, half), (start + half, half), (start, length)];
        for (place, (start, length)) in steps.into_iter().enumerate() {
            let values = &mut values[place * count..][..count];
            self.simulator.step_values(start, length, values)?;
        }
        Ok(())
    }

    fn observation_values(&self, time: f64, values: &mut [f64]) -> Result<(), StepError> {
        self.simulator.observation_values(time, values)
    }

    fn facts(&self) -> Vec<Fact> {
        self.simulator.facts()
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
        let shape = self.simulator.shape();
        let (first, second) = noise.split_at(shape.sources.len());
        let (scratch, mixed) = scratch.split_at_mut(shape.step_scratch);
        self.mix::<A>(first, second, mixed);
        let halves = [draws.at_half(0), draws.at_half(1)];
        let order = |path, values, noise, draws| Move {
            path,
            values,
            noise,
            draws,
        };
        // The twin takes the coefficients in the order of time: only noise and draws change places.
        let moves = [
            order(0, 0, Noise::First, halves[0]),
            order(0, 1, Noise::Second, halves[1]),
            order(1, 0, Noise::Second, halves[1]),
            order(1, 1, Noise::First, halves[0]),
            order(2, 2, Noise::Mixed, draws.apart_from_halves()),
        ];
        for step in moves {
            let noise = match step.noise {
                Noise::First => first,
                Noise::Second => second,
                Noise::Mixed => &*mixed,
            };
            let values = &values[step.values * shape.step_values..][..shape.step_values];
            let states = &mut states[step.path * shape.states..][..shape.states];
            self.simulator
                .step::<A>(values, states, noise, &step.draws, scratch);
        }
        if let Some(flag) = shape.left_domain {
            let (paths, left) = states.split_at_mut(3 * shape.states);
            for path in paths.chunks_exact(shape.states) {
                for (left, flag) in left[0].0.iter_mut().zip(&path[flag].0) {
                    *left = if *flag > *left { *flag } else { *left };
                }
            }
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
        let (shape, count) = (self.simulator.shape(), self.quantities());
        for path in 0..3 {
            let states = &states[path * shape.states..][..shape.states];
            let outputs = &mut outputs[path * count..][..count];
            self.simulator
                .observe::<A>(values, states, outputs, scratch);
        }
        let (paths, differences) = outputs.split_at_mut(3 * count);
        let (difference, correction) = differences.split_at_mut(count);
        for quantity in 0..count {
            let [fine, twin, coarse] = [0, 1, 2].map(|path| &paths[path * count + quantity]);
            for i in 0..LANES {
                difference[quantity][i] = fine[i] - coarse[i];
                correction[quantity][i] = 0.5 * (fine[i] + twin[i]) - coarse[i];
            }
        }
    }
}

impl<S: Simulator> Coupled<'_, S> {
    /// The normals of a coarse step out of those of its halves.
    #[inline(always)]
    fn mix<A: Arith>(&self, first: &[Lane], second: &[Lane], mixed: &mut [Lane]) {
        const ROOT: f64 = std::f64::consts::FRAC_1_SQRT_2;
        for (place, mixing) in self.mixing.iter().enumerate() {
            let (a, b, out) = (&first[place], &second[place], &mut mixed[place]);
            match *mixing {
                Mixing::Sum => {
                    for i in 0..LANES {
                        out[i] = ROOT * (a[i] + b[i]);
                    }
                }
                Mixing::Companion(driver) => {
                    let root = 0.375_f64.sqrt();
                    let (early, late) = (&first[driver], &second[driver]);
                    for i in 0..LANES {
                        let own = 0.5 * ROOT * (a[i] + b[i]);
                        out[i] = A::mul_add(root, early[i] - late[i], own);
                    }
                }
            }
        }
    }
}
