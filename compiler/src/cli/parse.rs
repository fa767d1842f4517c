//! Parsers of option values. Their errors end the command with status 2, before anything is read.

use std::path::PathBuf;
use std::str::FromStr;

use clap::builder::{PossibleValuesParser, TypedValueParser};
use driftwright_runtime::ArithmeticClass;

/// Most paths a run may have: the generator's counter gives a path index 64 bits, and every count up
/// to here is exact in a double.
const MAX_PATHS: u64 = 1 << 53;

/// Most steps a run may cut its horizon into.
const MAX_STEPS: u64 = 100_000_000;

fn number(text: &str) -> Result<f64, String> {
    let value = f64::from_str(text.trim()).map_err(|_| format!("`{text}` is not a number"))?;
    if value.is_finite() {
        Ok(value)
    } else {
        Err(format!("`{text}` is not a finite number"))
    }
}

fn whole(text: &str, most: u64) -> Result<u64, String> {
    let plain = text.trim().replace('_', "");
    let value = match plain.parse::<u64>() {
        Ok(value) => value,
        // `1e6` is a whole number too.
        Err(_) => {
            let value = number(&plain).map_err(|_| format!("`{text}` is not a whole number"))?;
            if value.fract() != 0.0 || value < 0.0 || value > most as f64 {
                return Err(format!(
                    "expected a whole number from 1 to {most}, not `{text}`"
                ));
            }
            value as u64
        }
    };
    if (1..=most).contains(&value) {
        Ok(value)
    } else {
        Err(format!(
            "expected a whole number from 1 to {most}, not `{text}`"
        ))
    }
}

/// A number of paths: `100000`, `100_000` or `1e5`.
pub(super) fn count(text: &str) -> Result<u64, String> {
    whole(text, MAX_PATHS)
}

/// A number of steps, written like a number of paths.
pub(super) fn steps(text: &str) -> Result<usize, String> {
    whole(text, MAX_STEPS).map(|n| n as usize)
}

/// A number of threads.
pub(super) fn threads(text: &str) -> Result<usize, String> {
    whole(text, 4096).map(|n| n as usize)
}

/// A horizon.
pub(super) fn positive(text: &str) -> Result<f64, String> {
    match number(text)? {
        value if value > 0.0 => Ok(value),
        _ => Err(format!("expected a time after 0, not `{text}`")),
    }
}

/// An observation time.
pub(super) fn time(text: &str) -> Result<f64, String> {
    match number(text)? {
        value if value >= 0.0 => Ok(value),
        _ => Err(format!("expected a time from 0 on, not `{text}`")),
    }
}

/// `name=value`.
pub(super) fn assignment(text: &str) -> Result<(String, f64), String> {
    let (name, value) = text
        .split_once('=')
        .ok_or_else(|| format!("expected NAME=VALUE, as in sigma=0.3, not `{text}`"))?;
    let name = name.trim();
    if name.is_empty() {
        return Err(format!("`{text}` names no parameter"));
    }
    Ok((name.to_owned(), number(value)?))
}

/// `I/N`: part I of N, from 1.
pub(super) fn part(text: &str) -> Result<(u64, u64), String> {
    let expected = || format!("expected I/N with 1 <= I <= N, as in 2/8, not `{text}`");
    let (index, of) = text.split_once('/').ok_or_else(expected)?;
    let index: u64 = index.trim().parse().map_err(|_| expected())?;
    let of: u64 = of.trim().parse().map_err(|_| expected())?;
    if (1..=of).contains(&index) {
        Ok((index, of))
    } else {
        Err(expected())
    }
}

fn file_with_ending(text: &str, endings: &[&str]) -> Result<PathBuf, String> {
    let path = PathBuf::from(text);
    let ending = path
        .extension()
        .and_then(|e| e.to_str())
        .unwrap_or("")
        .to_ascii_lowercase();
    if endings.contains(&ending.as_str()) {
        return Ok(path);
    }
    let list: Vec<String> = endings.iter().map(|e| format!(".{e}")).collect();
    Err(format!(
        "the file's ending chooses its form: {}",
        list.join(" or ")
    ))
}

/// A file for paths.
pub(super) fn paths_file(text: &str) -> Result<PathBuf, String> {
    file_with_ending(text, &["csv", "npy"])
}

/// A file for a fan chart.
pub(super) fn plot_file(text: &str) -> Result<PathBuf, String> {
    file_with_ending(text, &["svg"])
}

/// `fused` or `unfused`.
pub(super) fn arithmetic() -> impl TypedValueParser<Value = ArithmeticClass> {
    PossibleValuesParser::new(["fused", "unfused"]).map(|text| {
        if text == "fused" {
            ArithmeticClass::Fused
        } else {
            ArithmeticClass::Unfused
        }
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn counts_may_be_written_with_an_exponent() {
        assert_eq!(count("1e6"), Ok(1_000_000));
        assert_eq!(count("100_000"), Ok(100_000));
        for wrong in ["0", "-3", "1.5", "many", "1e40", "nan", ""] {
            assert!(count(wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn parts_count_from_one() {
        assert_eq!(part("1/4"), Ok((1, 4)));
        assert_eq!(part("4/4"), Ok((4, 4)));
        for wrong in ["0/4", "5/4", "1", "1/0", "a/b", "/"] {
            assert!(part(wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn assignments_need_a_name_and_a_finite_number() {
        assert_eq!(assignment("sigma=0.3"), Ok(("sigma".to_owned(), 0.3)));
        assert_eq!(assignment("mu=-1e-3"), Ok(("mu".to_owned(), -1e-3)));
        for wrong in ["sigma", "=1", "sigma=", "sigma=inf", "sigma=0,3"] {
            assert!(assignment(wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn endings_choose_the_form() {
        assert!(paths_file("a/b.NPY").is_ok());
        assert!(paths_file("a/b.txt").is_err());
        assert!(plot_file("fan.svg").is_ok());
        assert!(plot_file("fan").is_err());
    }
}
