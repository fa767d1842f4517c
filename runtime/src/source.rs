//! Sources of randomness and the version of the stream they draw from.

use std::borrow::Cow;

/// The version of the scheme that turns (seed, source, path, step, attempt) into
/// numbers. It changes whenever any draw would, and outputs record it.
pub const STREAM_VERSION: u32 = 1;

/// A source of randomness. Its stream depends on its name alone, so that adding or
/// reordering sources leaves the draws of all others as they were.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Source {
    /// The name, for instance that of a driver.
    pub name: Cow<'static, str>,
    /// The second word of the generator's key, [`source_id`] of the name.
    pub id: u64,
}

impl Source {
    /// A source with a name known at compile time.
    ///
    /// ```
    /// use driftwright_runtime::{Source, source_id};
    /// static SOURCES: [Source; 1] = [Source::new("W")];
    /// assert_eq!(SOURCES[0].id, source_id("W"));
    /// ```
    #[must_use]
    pub const fn new(name: &'static str) -> Source {
        Source {
            name: Cow::Borrowed(name),
            id: source_id(name),
        }
    }

    /// A source with a name built at run time.
    #[must_use]
    pub fn named(name: String) -> Source {
        Source {
            id: source_id(&name),
            name: Cow::Owned(name),
        }
    }
}

/// The number of a source: the 64-bit FNV-1a hash of the name's UTF-8 bytes (Fowler,
/// Noll, Vo), then the finaliser of the SplitMix64 generator (Steele, Lea, Flood 2014;
/// constants of Stafford's variant 13), which spreads short names over all bits.
/// Part of stream version 1.
#[must_use]
pub const fn source_id(name: &str) -> u64 {
    let bytes = name.as_bytes();
    let mut hash = 0xcbf2_9ce4_8422_2325_u64;
    let mut i = 0;
    while i < bytes.len() {
        hash = (hash ^ bytes[i] as u64).wrapping_mul(0x0000_0100_0000_01b3);
        i += 1;
    }
    mix(hash)
}

/// The SplitMix64 finaliser, a bijection of 64-bit words.
pub(crate) const fn mix(word: u64) -> u64 {
    let word = (word ^ (word >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    let word = (word ^ (word >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    word ^ (word >> 31)
}
