//! Threefry2x64 with 20 rounds.
//!
//! J. K. Salmon, M. A. Moraes, R. O. Dror, D. E. Shaw, "Parallel random numbers: as easy
//! as 1, 2, 3", SC11 (2011), section on Threefry.

/// The parity constant of the key schedule.
const PARITY: u64 = 0x1bd1_1bda_a9fc_1a22;

/// Four rounds, then the injection of a rotated key. Spelled out rather than looped, since
/// a loop inside a loop over lanes would keep that one from being vectorised.
macro_rules! four_rounds {
    ($x:ident, $y:ident, [$a:literal $b:literal $c:literal $d:literal], $k:expr, $l:expr, $n:literal) => {
        four_rounds!(@round $x $y $a);
        four_rounds!(@round $x $y $b);
        four_rounds!(@round $x $y $c);
        four_rounds!(@round $x $y $d);
        $x = $x.wrapping_add($k);
        $y = $y.wrapping_add($l).wrapping_add($n);
    };
    (@round $x:ident $y:ident $r:literal) => {
        $x = $x.wrapping_add($y);
        $y = $y.rotate_left($r) ^ $x;
    };
}

/// Two random words for a key and a counter.
///
/// ```
/// // The first of the authors' known-answer vectors.
/// let words = driftwright_runtime::random::threefry2x64_20([0, 0], [0, 0]);
/// assert_eq!(words, [0xc2b6e3a8c2c69865, 0x6f81ed42f350084d]);
/// ```
#[inline(always)]
#[must_use]
pub fn threefry2x64_20(key: [u64; 2], counter: [u64; 2]) -> [u64; 2] {
    let [k0, k1] = key;
    let k2 = PARITY ^ k0 ^ k1;
    let mut x = counter[0].wrapping_add(k0);
    let mut y = counter[1].wrapping_add(k1);
    four_rounds!(x, y, [16 42 12 31], k1, k2, 1);
    four_rounds!(x, y, [16 32 24 21], k2, k0, 2);
    four_rounds!(x, y, [16 42 12 31], k0, k1, 3);
    four_rounds!(x, y, [16 32 24 21], k1, k2, 4);
    four_rounds!(x, y, [16 42 12 31], k2, k0, 5);
    [x, y]
}
