//! How an exact number is written: whole, as a short decimal, or as a fraction.

use dashu_base::UnsignedAbs;

use super::node::Rational;

/// Longest decimal fraction that is printed as one.
const MAX_DECIMALS: usize = 9;

/// The digits of a non-negative number, and whether they hold a division sign.
pub(super) fn digits(value: &Rational) -> (String, bool) {
    debug_assert!(*value >= Rational::ZERO);
    if value.is_int() {
        return (value.numerator().to_string(), false);
    }
    match decimal(value) {
        Some(text) => (text, false),
        None => (
            format!("{}/{}", value.numerator(), value.denominator()),
            true,
        ),
    }
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
    Some(format!("{whole}.{fraction}"))
}

/// Whether a fraction is better shown as a numerator and a denominator of its own, as in `x/2`.
pub(super) fn splits(value: &Rational) -> bool {
    !value.is_int() && decimal(value).is_none()
}
