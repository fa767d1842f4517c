//! How an exact number is written: whole, as a short decimal, or as a fraction.

use dashu_base::UnsignedAbs;
use dashu_int::UBig;
use dashu_int::ops::DivRem;

use super::node::Rational;

/// Longest decimal fraction that is printed as one.
const MAX_DECIMALS: usize = 9;

/// Digits of a whole number that is written out. The language takes no literal beyond `1e308`, where
/// double precision ends.
const MAX_DIGITS: usize = 300;

/// The digits of a non-negative number, and whether they hold a division sign.
pub(super) fn digits(value: &Rational) -> (String, bool) {
    debug_assert!(*value >= Rational::ZERO);
    if value.is_int() {
        return (whole(&value.numerator().unsigned_abs()), false);
    }
    match decimal(value) {
        Some(text) => (text, false),
        None => {
            let (top, bottom) = parts(value);
            (format!("{top}/{bottom}"), true)
        }
    }
}

/// Numerator and denominator of a non-negative number.
pub(super) fn parts(value: &Rational) -> (String, String) {
    (
        whole(&value.numerator().unsigned_abs()),
        whole(value.denominator()),
    )
}

/// A whole number. What is too long for a literal is put together from shorter ones, in parentheses,
/// so that it reads back: `(12*1e300 + 5)`.
fn whole(value: &UBig) -> String {
    let written = value.to_string();
    let mut low = MAX_DIGITS;
    if written.len() <= low {
        return written;
    }
    // The lower part takes about half of the digits: the text nests as the logarithm of its length.
    while 2 * low < written.len() {
        low *= 2;
    }
    let (high, rest) = value.div_rem(UBig::from(10u8).pow(low));
    let radix = vec![format!("1e{MAX_DIGITS}"); low / MAX_DIGITS].join("*");
    let mut text = radix;
    if !high.is_one() {
        text = format!("{}*{text}", whole(&high));
    }
    if !rest.is_zero() {
        text = format!("{text} + {}", whole(&rest));
    }
    format!("({text})")
}

/// A decimal for numbers a person writes as one: 0.05, but 1/2 and 1/3.
fn decimal(value: &Rational) -> Option<String> {
    let denominator: u64 = value.denominator().try_into().ok()?;
    if denominator <= 8 && denominator.is_power_of_two() {
        return None;
    }
    let places = (1..=MAX_DECIMALS).find(|&n| 10u64.pow(n as u32).is_multiple_of(denominator))?;
    let scale = 10u64.pow(places as u32) / denominator;
    let scaled = (value.numerator().unsigned_abs() * scale).to_string();
    let padded = format!("{scaled:0>width$}", width = places + 1);
    let (whole, fraction) = padded.split_at(padded.len() - places);
    (whole.len() <= MAX_DIGITS).then(|| format!("{whole}.{fraction}"))
}

/// Whether a fraction is better shown as a numerator and a denominator of its own, as in `x/2`.
pub(super) fn splits(value: &Rational) -> bool {
    !value.is_int() && decimal(value).is_none()
}
