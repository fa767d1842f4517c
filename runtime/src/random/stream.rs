//! The addressed generators as sequential ones, for crates that take `rand_core`'s traits.

use std::convert::Infallible;

use rand_core::{SeedableRng, TryRng, utils};

use super::{Address, Generator};

/// The words of one path and source, block after block: the very words a simulation draws
/// from, in the order of its steps.
///
/// ```
/// use driftwright_runtime::random::{Address, Generator, WordStream};
/// use rand_core::Rng;
/// let mut stream = WordStream::new(Generator::Philox4x32, 7, 9, 5);
/// let address = Address { seed: 7, source: 9, block: 0, attempt: 0 };
/// assert_eq!(stream.next_u64(), Generator::Philox4x32.words(&address, 5)[0]);
/// ```
#[derive(Clone, Debug)]
pub struct WordStream {
    generator: Generator,
    address: Address,
    path: u64,
    second: Option<u64>,
}

impl WordStream {
    /// The stream of a path and a source. It repeats after 2^65 words.
    #[must_use]
    pub fn new(generator: Generator, seed: u64, source: u64, path: u64) -> WordStream {
        WordStream {
            generator,
            address: Address {
                seed,
                source,
                block: 0,
                attempt: 0,
            },
            path,
            second: None,
        }
    }

    /// The next word.
    fn word(&mut self) -> u64 {
        if let Some(word) = self.second.take() {
            return word;
        }
        let [first, second] = self.generator.words(&self.address, self.path);
        // The attempt lies above the block in the same word of the counter.
        self.address.block = self.address.block.wrapping_add(1);
        self.second = Some(second);
        first
    }
}

impl TryRng for WordStream {
    type Error = Infallible;

    fn try_next_u32(&mut self) -> Result<u32, Infallible> {
        Ok(self.word() as u32)
    }

    fn try_next_u64(&mut self) -> Result<u64, Infallible> {
        Ok(self.word())
    }

    fn try_fill_bytes(&mut self, destination: &mut [u8]) -> Result<(), Infallible> {
        utils::fill_bytes_via_next_word(destination, || Ok(self.word()))
    }
}

impl SeedableRng for WordStream {
    /// Seed, source and path as little-endian words.
    type Seed = [u8; 24];

    fn from_seed(seed: [u8; 24]) -> WordStream {
        let [key, source, path] = utils::read_words(&seed);
        WordStream::new(Generator::default(), key, source, path)
    }
}
