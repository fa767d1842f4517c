//! Draws with parameters of their own on every path, taken within a step.

use super::gamma::Gamma;
use super::poisson::Poisson;
use super::{Address, Generator, Philox, Threefry, Words};
use crate::arith::{Arith, ArithmeticClass};
use crate::dispatch::{Target, Task};
use crate::lane::{LANES, Lane};
use crate::source::{mix, source_id};

/// Attempts of a rejection method, each of which takes two places of the attempt's 2^16. Acceptance is
/// above 0.7 throughout, so that the last one is out of reach.
const ATTEMPTS: u64 = 1 << 15;

/// Where the draws of one step on one block of paths come from.
///
/// A gamma or Poisson number is a function of (seed, source, path, step), its parameter and the
/// arithmetic class, and of nothing else.
///
/// ```
/// use driftwright_runtime::random::Draws;
/// use driftwright_runtime::{ArithmeticClass, Generator, Lane, source_id};
///
/// let draws = Draws::new(7, Generator::default(), ArithmeticClass::Unfused, 0, 0);
/// let (mut gamma, mut count) = (Lane::ZERO, Lane::ZERO);
/// draws.gamma(source_id("waiting time"), &Lane::splat(2.5), &mut gamma);
/// draws.poisson(source_id("arrivals"), &Lane::splat(4.0), &mut count);
/// assert!(gamma.iter().all(|g| *g > 0.0));
/// assert!(count.iter().all(|n| *n >= 0.0 && n.fract() == 0.0));
/// ```
#[derive(Clone, Copy, Debug)]
pub struct Draws {
    pub(super) seed: u64,
    pub(super) generator: Generator,
    pub(super) target: Target,
    pub(super) step: u64,
    pub(super) first_path: u64,
}

impl Draws {
    /// The draws of step number `step` (below 2^48) on the block of paths from `first_path`, in the
    /// arithmetic class that is asked for or, on a processor without the instruction, the unfused one.
    #[must_use]
    pub fn new(
        seed: u64,
        generator: Generator,
        class: ArithmeticClass,
        step: u64,
        first_path: u64,
    ) -> Draws {
        let target = Target::new(None, class);
        Draws::on(target, seed, generator, step, first_path)
    }

    /// As [`Draws::new`], on a target.
    pub(crate) fn on(
        target: Target,
        seed: u64,
        generator: Generator,
        step: u64,
        first_path: u64,
    ) -> Draws {
        Draws {
            seed,
            generator,
            target,
            step,
            first_path,
        }
    }

    /// The draws of one half of the step, as if the grid had steps of half the length.
    pub(crate) fn at_half(&self, half: u64) -> Draws {
        Draws {
            step: 2 * self.step + half,
            ..*self
        }
    }

    /// Draws of the whole step that are independent of those of its halves.
    pub(crate) fn apart_from_halves(&self) -> Draws {
        Draws {
            seed: mix(self.seed.wrapping_add(source_id("coarse"))),
            ..*self
        }
    }

    /// One gamma number a path, of scale 1, from the source with the number `source`
    /// ([`crate::source_id`] of its name).
    ///
    /// The shape may differ from path to path. Shape 0 gives 0, an infinite one infinity, a negative one
    /// or NaN gives NaN.
    pub fn gamma(&self, source: u64, shape: &Lane, out: &mut Lane) {
        self.fill::<Gamma>(source, shape, out);
    }

    /// One Poisson number a path, likewise. Mean 0 gives 0, an infinite one infinity, a negative one or
    /// NaN gives NaN.
    pub fn poisson(&self, source: u64, mean: &Lane, out: &mut Lane) {
        self.fill::<Poisson>(source, mean, out);
    }

    fn fill<L: Rejection>(&self, source: u64, parameter: &Lane, out: &mut Lane) {
        let address = Address {
            seed: self.seed,
            source,
            block: self.step,
            attempt: 0,
        };
        match self.generator {
            Generator::Threefry2x64 => self.run::<L, Threefry>(address, parameter, out),
            Generator::Philox4x32 => self.run::<L, Philox>(address, parameter, out),
        }
    }

    fn run<L: Rejection, G: Words>(&self, address: Address, parameter: &Lane, out: &mut Lane) {
        self.target.run(Fill::<L, G> {
            address,
            first_path: self.first_path,
            parameter,
            out,
            law: std::marker::PhantomData,
        });
    }
}

/// A law with one parameter, drawn by rejection.
pub(super) trait Rejection {
    /// The number that the parameter gives without any draw: at 0, at infinity, and where the law does
    /// not exist.
    fn without_draw(parameter: f64) -> Option<f64> {
        match parameter {
            p if p > 0.0 && p < f64::INFINITY => None,
            p if p >= 0.0 => Some(p),
            _ => Some(f64::NAN),
        }
    }

    /// An attempt from four words: the number, and whether it is accepted. Comes to an end for any
    /// parameter, those without a draw too.
    fn attempt<A: Arith>(parameter: f64, words: [u64; 4]) -> (f64, bool);
}

/// The numbers of a block of paths.
struct Fill<'a, L, G> {
    address: Address,
    first_path: u64,
    parameter: &'a Lane,
    out: &'a mut Lane,
    law: std::marker::PhantomData<(L, G)>,
}

impl<L: Rejection, G: Words> Task for Fill<'_, L, G> {
    type Output = ();

    #[inline(always)]
    fn run<A: Arith>(self) {
        // The words of the first attempt are made for all paths at once, which vectorises.
        let mut words = [[0u64; 4]; LANES];
        let [first, second] = prepared::<G>(&self.address, 0);
        for (i, words) in words.iter_mut().enumerate() {
            let path = self.first_path.wrapping_add(i as u64);
            let ([a, b], [c, d]) = (G::words(first, path), G::words(second, path));
            *words = [a, b, c, d];
        }
        let mut accepted = [false; LANES];
        for i in 0..LANES {
            (self.out[i], accepted[i]) = L::attempt::<A>(self.parameter[i], words[i]);
        }
        for (i, mut accepted) in accepted.into_iter().enumerate() {
            let parameter = self.parameter[i];
            if let Some(value) = L::without_draw(parameter) {
                self.out[i] = value;
                continue;
            }
            let mut value = self.out[i];
            let mut attempt = 1;
            while !accepted && attempt < ATTEMPTS {
                let [first, second] = prepared::<G>(&self.address, attempt);
                let path = self.first_path.wrapping_add(i as u64);
                let ([a, b], [c, d]) = (G::words(first, path), G::words(second, path));
                (value, accepted) = L::attempt::<A>(parameter, [a, b, c, d]);
                attempt += 1;
            }
            self.out[i] = value;
        }
    }
}

/// The two places of an attempt.
#[inline(always)]
fn prepared<G: Words>(address: &Address, attempt: u64) -> [G::Prepared; 2] {
    [2 * attempt, 2 * attempt + 1].map(|attempt| {
        G::prepare(&Address {
            attempt,
            ..*address
        })
    })
}
