//! Numbers for people: as many digits as say something.

/// A number to about six significant digits, without an exponent where that stays short.
///
/// ```
/// use driftwright::report::number::significant;
/// assert_eq!(significant(44.153211, 6), "44.1532");
/// assert_eq!(significant(0.0, 6), "0");
/// assert_eq!(significant(1.5e-9, 3), "1.5e-9");
/// assert_eq!(significant(f64::NAN, 6), "not a number");
/// ```
pub fn significant(value: f64, digits: usize) -> String {
    if value.is_nan() {
        return "not a number".to_owned();
    }
    if value.is_infinite() {
        return if value > 0.0 { "inf" } else { "-inf" }.to_owned();
    }
    if value == 0.0 {
        return "0".to_owned();
    }
    // The exponent after rounding to the digits shown.
    let scientific = format!("{value:.*e}", digits.saturating_sub(1));
    let (mantissa, exponent) = scientific
        .split_once('e')
        .unwrap_or((scientific.as_str(), "0"));
    let exponent: i32 = exponent.parse().unwrap_or(0);
    if (-4..=(digits as i32 + 2)).contains(&exponent) {
        let decimals = (digits as i32 - 1 - exponent).max(0) as usize;
        trim(format!("{value:.decimals$}"))
    } else {
        format!("{}e{exponent}", trim(mantissa.to_owned()))
    }
}

/// Without the zeros behind the last digit that says something.
fn trim(text: String) -> String {
    if text.contains('.') {
        text.trim_end_matches('0').trim_end_matches('.').to_owned()
    } else {
        text
    }
}

/// `value ± error`: the error to two digits, the value to the same decimal place.
///
/// ```
/// use driftwright::report::number::with_error;
/// assert_eq!(with_error(44.153211, 0.0281), "44.153 ± 0.028");
/// ```
pub fn with_error(value: f64, error: f64) -> String {
    if !(error.is_finite() && error > 0.0 && value.is_finite()) {
        return significant(value, 6);
    }
    let place = error.log10().floor() as i32 - 1;
    if !(-7..=6).contains(&place) {
        return format!("{} ± {}", significant(value, 6), significant(error, 2));
    }
    let decimals = (-place).max(0) as usize;
    format!("{value:.decimals$} ± {error:.decimals$}")
}

/// A whole number with its thousands set apart: `100,000`.
///
/// ```
/// assert_eq!(driftwright::report::number::grouped(1234567), "1,234,567");
/// ```
pub fn grouped(value: u64) -> String {
    let digits = value.to_string();
    let mut out = String::new();
    for (i, c) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            out.push(',');
        }
        out.push(c);
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn digits_follow_the_size() {
        assert_eq!(significant(123456.789, 6), "123457");
        assert_eq!(significant(1.0, 6), "1");
        assert_eq!(significant(-0.000123456789, 4), "-0.0001235");
        assert_eq!(significant(9.9999999e20, 3), "1e21");
        assert_eq!(significant(0.99999999, 4), "1");
    }

    #[test]
    fn errors_set_the_decimal_place() {
        assert_eq!(with_error(1234.5, 12.0), "1234 ± 12");
        assert_eq!(with_error(0.5, 0.0), "0.5");
        assert_eq!(with_error(2.0, f64::NAN), "2");
    }
}
