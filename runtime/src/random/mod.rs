//! Random numbers addressed by (seed, source, path, step, attempt): stream version 1.
//!
//! A counter-based generator turns an address into two 64-bit words, without any state.
//! One call serves a path, a source and two steps: `block = step / 2`, and its two normals
//! belong to the steps `2 block` and `2 block + 1`.
//!
//! | | key | counter |
//! |---|---|---|
//! | Threefry2x64-20 | `seed`, `source id` | `path`, `block + (attempt << 48)` |
//! | Philox4x32-10 | halves of `mix(seed + mix(source id))`, low first | halves of both words above, low first |
//!
//! `mix` is the SplitMix64 finaliser, `+` wraps; Philox's four words make two, low word first.
//! The attempt is 0 for normals; a rejection method counts it up. Uniform numbers and
//! normals come from the words as [`uniform`] and [`normal_pair`] say.
//!
//! A gamma or Poisson number ([`Draws`]) has a step to itself: `block = step`, and its attempt number n
//! takes the four words at the attempts `2 n` and `2 n + 1`. Levy areas ([`Draws::areas`]) too have a step to
//! themselves: the two normals of term n of a driver stand at attempt n, those of a remainder at attempt 0.

mod areas;
mod draws;
mod gamma;
mod normal;
mod philox;
mod poisson;
#[cfg(feature = "rand_core")]
mod stream;
mod threefry;

use std::fmt;
use std::str::FromStr;

pub use areas::area_terms;
pub use draws::Draws;
pub(crate) use normal::fill_normals;
pub use normal::{normal_pair, uniform};
pub use philox::philox4x32_10;
#[cfg(feature = "rand_core")]
pub use stream::WordStream;
pub use threefry::threefry2x64_20;

use crate::source::mix;

/// The counter-based generator behind a run's random numbers.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub enum Generator {
    /// Threefry2x64 with 20 rounds, the default.
    #[default]
    Threefry2x64,
    /// Philox4x32 with 10 rounds, to see that nothing hangs on the generator.
    Philox4x32,
}

impl fmt::Display for Generator {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Generator::Threefry2x64 => "threefry2x64",
            Generator::Philox4x32 => "philox4x32",
        })
    }
}

/// A text that names no generator.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct UnknownGenerator(pub String);

impl fmt::Display for UnknownGenerator {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "`{}` is not a generator: write `threefry2x64` or `philox4x32`",
            self.0
        )
    }
}

impl std::error::Error for UnknownGenerator {}

impl FromStr for Generator {
    type Err = UnknownGenerator;

    fn from_str(text: &str) -> Result<Self, Self::Err> {
        match text {
            "threefry2x64" => Ok(Generator::Threefry2x64),
            "philox4x32" => Ok(Generator::Philox4x32),
            _ => Err(UnknownGenerator(text.to_owned())),
        }
    }
}

/// Where a draw comes from, the path aside.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Address {
    /// The seed of the run.
    pub seed: u64,
    /// The number of the source, [`crate::Source::id`].
    pub source: u64,
    /// Half the index of the step, below 2^48.
    pub block: u64,
    /// How often a rejection method has drawn here before, below 2^16.
    pub attempt: u64,
}

impl Address {
    /// The second word of the counter.
    #[inline(always)]
    fn position(&self) -> u64 {
        self.block | self.attempt << 48
    }
}

/// A generator as a type, so that loops over lanes are compiled for each.
pub(crate) trait Words: Copy {
    /// What is the same for all paths.
    type Prepared: Copy;
    fn prepare(address: &Address) -> Self::Prepared;
    fn words(prepared: Self::Prepared, path: u64) -> [u64; 2];
}

#[derive(Clone, Copy)]
pub(crate) struct Threefry;

impl Words for Threefry {
    type Prepared = ([u64; 2], u64);

    #[inline(always)]
    fn prepare(address: &Address) -> Self::Prepared {
        ([address.seed, address.source], address.position())
    }

    #[inline(always)]
    fn words((key, position): Self::Prepared, path: u64) -> [u64; 2] {
        threefry2x64_20(key, [path, position])
    }
}

#[derive(Clone, Copy)]
pub(crate) struct Philox;

impl Words for Philox {
    type Prepared = ([u32; 2], u64);

    #[inline(always)]
    fn prepare(address: &Address) -> Self::Prepared {
        let key = mix(address.seed.wrapping_add(mix(address.source)));
        ([key as u32, (key >> 32) as u32], address.position())
    }

    #[inline(always)]
    fn words((key, position): Self::Prepared, path: u64) -> [u64; 2] {
        let counter = [
            path as u32,
            (path >> 32) as u32,
            position as u32,
            (position >> 32) as u32,
        ];
        let [a, b, c, d] = philox4x32_10(key, counter).map(u64::from);
        [a | b << 32, c | d << 32]
    }
}

impl Generator {
    /// The two words at an address.
    ///
    /// ```
    /// use driftwright_runtime::random::{Address, Generator, threefry2x64_20};
    /// let address = Address { seed: 7, source: 9, block: 3, attempt: 1 };
    /// let words = Generator::Threefry2x64.words(&address, 5);
    /// assert_eq!(words, threefry2x64_20([7, 9], [5, 3 | 1 << 48]));
    /// ```
    #[must_use]
    pub fn words(self, address: &Address, path: u64) -> [u64; 2] {
        match self {
            Generator::Threefry2x64 => Threefry::words(Threefry::prepare(address), path),
            Generator::Philox4x32 => Philox::words(Philox::prepare(address), path),
        }
    }
}
