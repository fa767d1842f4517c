//! Uniform numbers and normals from random words.

use super::{Address, Generator, Philox, Threefry, Words};
use crate::arith::Arith;
use crate::dispatch::{Target, Task};
use crate::lane::{LANES, Lane};
use crate::math;

/// A uniform number strictly between 0 and 1: `((word >> 12) + 1/2) 2^-52`, exactly.
///
/// ```
/// use driftwright_runtime::random::uniform;
/// assert_eq!(uniform(0), 0.5f64.powi(53));
/// assert_eq!(uniform(u64::MAX), 1.0 - 0.5f64.powi(53));
/// ```
#[inline(always)]
#[must_use]
pub fn uniform(word: u64) -> f64 {
    // The mantissa of a number in [1, 2), less what leaves the half: no conversion, which
    // vector units before AVX-512 do not have for 64-bit integers.
    const ONE_LESS_HALF: f64 = 1.0 - f64::EPSILON / 2.0;
    f64::from_bits(word >> 12 | 0x3ff0_0000_0000_0000) - ONE_LESS_HALF
}

/// Two independent standard normals from two words, by the transform of G. E. P. Box and
/// M. E. Muller, Annals of Mathematical Statistics 29 (1958):
/// `sqrt(-2 ln u1) cos(2 pi u2)` and `sqrt(-2 ln u1) sin(2 pi u2)`, `u` by [`uniform`].
///
/// Their bits depend on the arithmetic class, and on nothing else.
#[inline(always)]
#[must_use]
pub fn normal_pair<A: Arith>(words: [u64; 2]) -> [f64; 2] {
    let radius = (-2.0 * math::ln_positive::<A>(uniform(words[0]))).sqrt();
    let (sine, cosine) = math::sin_cos_turns::<A>(uniform(words[1]));
    [radius * cosine, radius * sine]
}

/// The normals of a block of paths at one address.
struct Fill<'a, G: Words> {
    prepared: G::Prepared,
    first_path: u64,
    even: &'a mut Lane,
    odd: &'a mut Lane,
}

impl<G: Words> Task for Fill<'_, G> {
    type Output = ();

    #[inline(always)]
    fn run<A: Arith>(self) {
        let mut words = [[0u64; LANES]; 2];
        let [first, second] = &mut words;
        for i in 0..LANES {
            [first[i], second[i]] = G::words(self.prepared, self.first_path.wrapping_add(i as u64));
        }
        for i in 0..LANES {
            [self.even[i], self.odd[i]] = normal_pair::<A>([first[i], second[i]]);
        }
    }
}

/// Fills the normals of two consecutive steps for the block of paths from `first_path`.
/// Not generic over the model: compiled once, here.
pub(crate) fn fill_normals(
    target: Target,
    generator: Generator,
    address: &Address,
    first_path: u64,
    [even, odd]: [&mut Lane; 2],
) {
    match generator {
        Generator::Threefry2x64 => target.run(Fill::<Threefry> {
            prepared: Threefry::prepare(address),
            first_path,
            even,
            odd,
        }),
        Generator::Philox4x32 => target.run(Fill::<Philox> {
            prepared: Philox::prepare(address),
            first_path,
            even,
            odd,
        }),
    }
}
