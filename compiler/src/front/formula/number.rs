//! Decimal numbers, read as exact rationals.

use std::str::FromStr;

use dashu_int::{IBig, UBig};

use crate::symbolic::Rational;

/// Why a number cannot be read.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum NumberError {
    /// Not of the form `12.5e-3`.
    Malformed,
    /// More than `MAX_DIGITS` digits.
    TooLong,
    /// Its size does not fit a double precision number.
    OutOfRange,
}

/// Digits a number may have.
const MAX_DIGITS: usize = 1000;
/// Decimal exponents (of the leading digit) a double precision number can hold.
const EXPONENTS: std::ops::RangeInclusive<i64> = -307..=307;

/// The exact value of an unsigned decimal such as `0.05` or `1e-3`.
///
/// # Errors
/// See [`NumberError`].
///
/// ```
/// use driftwright::front::formula::decimal;
/// assert_eq!(decimal("0.05").unwrap().to_string(), "1/20");
/// ```
pub fn decimal(text: &str) -> Result<Rational, NumberError> {
    let (mantissa, exponent) = match text.split_once(['e', 'E']) {
        Some((mantissa, exponent)) => (mantissa, parse_exponent(exponent)?),
        None => (text, 0),
    };
    let (whole, fraction) = match mantissa.split_once('.') {
        Some((_, "")) => return Err(NumberError::Malformed),
        Some(parts) => parts,
        None => (mantissa, ""),
    };
    let digits = format!("{whole}{fraction}");
    if whole.is_empty() || !digits.bytes().all(|b| b.is_ascii_digit()) {
        return Err(NumberError::Malformed);
    }
    if digits.len() > MAX_DIGITS {
        return Err(NumberError::TooLong);
    }
    let significant = digits.trim_start_matches('0');
    if significant.is_empty() {
        return Ok(Rational::ZERO);
    }
    let scale = exponent - fraction.len() as i64;
    if !EXPONENTS.contains(&(scale + significant.len() as i64 - 1)) {
        return Err(NumberError::OutOfRange);
    }
    let value = IBig::from_str(significant).map_err(|_| NumberError::Malformed)?;
    let power = UBig::from(10u8).pow(scale.unsigned_abs() as usize);
    Ok(if scale < 0 {
        Rational::from_parts(value, power)
    } else {
        Rational::from(value * IBig::from(power))
    })
}

fn parse_exponent(text: &str) -> Result<i64, NumberError> {
    let digits = text.strip_prefix(['+', '-']).unwrap_or(text);
    if digits.is_empty() || !digits.bytes().all(|b| b.is_ascii_digit()) {
        return Err(NumberError::Malformed);
    }
    // Exponents of more digits are far out of range whatever the mantissa, unless it is zero; a
    // bound keeps the sum of exponents from overflowing.
    let value: i64 = digits.parse().unwrap_or(i64::MAX / 4).min(i64::MAX / 4);
    Ok(if text.starts_with('-') { -value } else { value })
}

#[cfg(test)]
mod tests {
    use super::{NumberError, decimal};

    #[test]
    fn decimals_are_exact() {
        for (text, expected) in [
            ("0", "0"),
            ("007", "7"),
            ("0.5", "1/2"),
            ("1e-3", "1/1000"),
            ("1.25E+2", "125"),
            ("0e999999999999999999999", "0"),
        ] {
            assert_eq!(decimal(text).unwrap().to_string(), expected, "{text}");
        }
    }

    #[test]
    fn malformed_and_extreme_numbers_are_refused() {
        for text in ["", ".", ".5", "5.", "1e", "1e+", "1_0", "1.2.3"] {
            assert_eq!(decimal(text), Err(NumberError::Malformed), "{text}");
        }
        for text in [
            "1e308",
            "1e-400",
            "1e99999999999999999999",
            "1e-99999999999999999999",
        ] {
            assert_eq!(decimal(text), Err(NumberError::OutOfRange), "{text}");
        }
        assert_eq!(decimal(&"1".repeat(1001)), Err(NumberError::TooLong));
    }
}
