//! "Did you mean": the nearest of the names that exist.

use super::names::{appearance, code_points};

/// A hint that names the nearest of `known`, if one is near enough to be meant. One that looks the same
/// is told apart by its code points.
pub(crate) fn did_you_mean<'a>(
    name: &str,
    known: impl IntoIterator<Item = &'a str>,
) -> Option<String> {
    let best = nearest(name, known)?;
    if best != name && appearance(best) == appearance(name) {
        let (best_points, points) = (code_points(best), code_points(name));
        return Some(format!(
            "`{best}` with {best_points} looks the same as this with {points}: use one character for both"
        ));
    }
    Some(format!("did you mean `{best}`?"))
}

/// The nearest of `known`: a third of the letters may differ, one of a short name; case counts little,
/// and letters that look alike are the same. Else the only one that `name` is the beginning of.
pub(super) fn nearest<'a>(name: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let folded = appearance(name).to_lowercase();
    let limit = (name.chars().count() / 3).max(1);
    let mut best: Option<(usize, &str)> = None;
    let mut longer: Vec<&str> = Vec::new();
    for candidate in known {
        let other = appearance(candidate).to_lowercase();
        let distance = strsim::damerau_levenshtein(&folded, &other);
        // Of a single letter only the case can be wrong: it is near to too many others.
        let near = distance <= limit && (distance == 0 || distance < folded.chars().count());
        if near && best.is_none_or(|(least, _)| distance < least) {
            best = Some((distance, candidate));
        }
        if folded.len() >= 3 && other.starts_with(&folded) {
            longer.push(candidate);
        }
    }
    let completed = match longer[..] {
        [only] => Some(only),
        _ => None,
    };
    best.map(|(_, candidate)| candidate).or(completed)
}

/// The list of choices as people write it: `a`, `b` or `c`.
pub(super) fn one_of<'a>(choices: impl IntoIterator<Item = &'a str>) -> String {
    let quoted: Vec<String> = choices.into_iter().map(|c| format!("`{c}`")).collect();
    match quoted.split_last() {
        Some((last, rest)) if !rest.is_empty() => format!("{} or {last}", rest.join(", ")),
        Some((last, _)) => last.clone(),
        None => "nothing".to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::{nearest, one_of};

    #[test]
    fn near_names_are_found_and_far_ones_are_not() {
        let known = ["mu", "sigma", "kappa", "theta"];
        for (name, expected) in [
            ("sgima", Some("sigma")),
            ("Mu", Some("mu")),
            ("kapa", Some("kappa")),
            ("rho", None),
            ("m", None),
            ("MU", Some("mu")),
            ("the", Some("theta")),
            ("th", None),
            ("\u{43c}u", Some("mu")),
            ("k\u{430}ppa", Some("kappa")),
        ] {
            assert_eq!(nearest(name, known), expected, "{name}");
        }
    }

    #[test]
    fn choices_read_as_a_list() {
        assert_eq!(one_of(["a", "b", "c"]), "`a`, `b` or `c`");
        assert_eq!(one_of(["a"]), "`a`");
    }
}
