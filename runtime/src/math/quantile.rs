//! The normal quantile.

#![allow(clippy::excessive_precision)] // the coefficients stand as published

use super::{ln, polynomial};
use crate::arith::Arith;

/// Standard normal quantile: the `x` with `normal_cdf(x) = p`. Infinite at 0 and 1, NaN outside.
///
/// M. J. Wichura, "Algorithm AS 241: the percentage points of the normal distribution",
/// Applied Statistics 37 (1988), routine PPND16: relative error about 1e-16 in exact
/// arithmetic. Coefficients recalled from the paper and confirmed by the tests.
///
/// ```
/// use driftwright_runtime::{Unfused, math::normal_quantile};
/// assert!((normal_quantile::<Unfused>(0.975) - 1.959963984540054).abs() < 1e-14);
/// ```
#[inline(always)]
#[must_use]
pub fn normal_quantile<A: Arith>(p: f64) -> f64 {
    let q = p - 0.5;
    let centre = central::<A>(q);
    let tail_mass = if q < 0.0 { p } else { 1.0 - p };
    let r = (-ln::<A>(tail_mass)).sqrt();
    let tail = if r <= 5.0 {
        middle::<A>(r - 1.6)
    } else {
        far::<A>(r - 5.0)
    };
    let tail = if r == f64::INFINITY { r } else { tail };
    let tail = if q < 0.0 { -tail } else { tail };
    if q.abs() <= 0.425 { centre } else { tail }
}

/// `|p - 1/2| <= 0.425`.
#[inline(always)]
fn central<A: Arith>(q: f64) -> f64 {
    let r = A::mul_add(-q, q, 0.180625);
    let top = polynomial::<A, 8>(
        r,
        [
            2.509_080_928_730_122_672_7e3,
            3.343_057_558_358_812_810_5e4,
            6.726_577_092_700_870_085_3e4,
            4.592_195_393_154_987_145_7e4,
            1.373_169_376_550_946_112_5e4,
            1.971_590_950_306_551_442_7e3,
            1.331_416_678_917_843_774_5e2,
            3.387_132_872_796_366_608,
        ],
    );
    let bottom = polynomial::<A, 8>(
        r,
        [
            5.226_495_278_852_854_561e3,
            2.872_908_573_572_194_267_4e4,
            3.930_789_580_009_271_061e4,
            2.121_379_430_158_659_586_7e4,
            5.394_196_021_424_751_107_7e3,
            6.871_870_074_920_579_083e2,
            4.231_333_070_160_091_125_2e1,
            1.0,
        ],
    );
    q * top / bottom
}

/// `sqrt(-ln(tail mass)) <= 5`, argument less 1.6.
#[inline(always)]
fn middle<A: Arith>(r: f64) -> f64 {
    let top = polynomial::<A, 8>(
        r,
        [
            7.745_450_142_783_414_076_4e-4,
            2.272_384_498_926_918_458_6e-2,
            2.417_807_251_774_506_117_7e-1,
            1.270_458_252_452_368_382_6,
            3.647_848_324_763_204_605_1,
            5.769_497_221_460_691_405_5,
            4.630_337_846_156_545_295_9,
            1.423_437_110_749_683_577_3,
        ],
    );
    let bottom = polynomial::<A, 8>(
        r,
        [
            1.050_750_071_644_416_843_2e-9,
            5.475_938_084_995_344_946e-4,
            1.519_866_656_361_645_719_7e-2,
            1.481_039_764_274_800_745_9e-1,
            6.897_673_349_851_000_045_5e-1,
            1.676_384_830_183_803_849_4,
            2.053_191_626_637_758_821_9,
            1.0,
        ],
    );
    top / bottom
}

/// The far tail, argument less 5.
#[inline(always)]
fn far<A: Arith>(r: f64) -> f64 {
    let top = polynomial::<A, 8>(
        r,
        [
            2.010_334_399_292_288_132_7e-7,
            2.711_555_568_743_487_578_2e-5,
            1.242_660_947_388_078_438_6e-3,
            2.653_218_952_657_612_309_3e-2,
            2.965_605_718_285_048_912_3e-1,
            1.784_826_539_917_291_335_8,
            5.463_784_911_164_114_369_9,
            6.657_904_643_501_103_777_2,
        ],
    );
    let bottom = polynomial::<A, 8>(
        r,
        [
            2.044_263_103_389_939_785_6e-15,
            1.421_511_758_316_445_888_7e-7,
            1.846_318_317_510_054_681_8e-5,
            7.868_691_311_456_132_591e-4,
            1.487_536_129_085_061_485_2e-2,
            1.369_298_809_227_358_053_7e-1,
            5.998_322_065_558_879_376_9e-1,
            1.0,
        ],
    );
    top / bottom
}
