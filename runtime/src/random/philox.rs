//! Philox4x32 with 10 rounds.
//!
//! J. K. Salmon, M. A. Moraes, R. O. Dror, D. E. Shaw, "Parallel random numbers: as easy
//! as 1, 2, 3", SC11 (2011), section on Philox.

const MULTIPLIERS: [u64; 2] = [0xd251_1f53, 0xcd9e_8d57];
const WEYL: [u32; 2] = [0x9e37_79b9, 0xbb67_ae85];
const LOW: u64 = 0xffff_ffff;

/// One round on words held in the low halves of 64-bit lanes, which is what vector units multiply.
#[inline(always)]
fn round([a, b, c, d]: [u64; 4], key: [u32; 2], number: u32) -> [u64; 4] {
    let first = MULTIPLIERS[0] * a;
    let second = MULTIPLIERS[1] * c;
    let k0 = u64::from(key[0].wrapping_add(WEYL[0].wrapping_mul(number)));
    let k1 = u64::from(key[1].wrapping_add(WEYL[1].wrapping_mul(number)));
    [
        (second >> 32) ^ b ^ k0,
        second & LOW,
        (first >> 32) ^ d ^ k1,
        first & LOW,
    ]
}

/// Four random words for a key and a counter, least significant word first.
///
/// ```
/// // The first of the authors' known-answer vectors.
/// let words = driftwright_runtime::random::philox4x32_10([0, 0], [0, 0, 0, 0]);
/// assert_eq!(words, [0x6627e8d5, 0xe169c58d, 0xbc57ac4c, 0x9b00dbd8]);
/// ```
#[inline(always)]
#[must_use]
pub fn philox4x32_10(key: [u32; 2], counter: [u32; 4]) -> [u32; 4] {
    let x = counter.map(u64::from);
    // Spelled out, as the rounds of Threefry are.
    let x = round(x, key, 0);
    let x = round(x, key, 1);
    let x = round(x, key, 2);
    let x = round(x, key, 3);
    let x = round(x, key, 4);
    let x = round(x, key, 5);
    let x = round(x, key, 6);
    let x = round(x, key, 7);
    let x = round(x, key, 8);
    let x = round(x, key, 9);
    x.map(|word| word as u32)
}
