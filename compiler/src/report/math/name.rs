//! Names as they are set: Greek letters for their names, subscripts for what stands behind an underscore
//! and for digits at the end.

use crate::symbolic::Pool;

/// Names of Greek letters, and the letters.
const GREEK: [(&str, char); 34] = [
    ("alpha", 'α'),
    ("beta", 'β'),
    ("gamma", 'γ'),
    ("delta", 'δ'),
    ("epsilon", 'ε'),
    ("zeta", 'ζ'),
    ("eta", 'η'),
    ("theta", 'θ'),
    ("iota", 'ι'),
    ("kappa", 'κ'),
    ("lambda", 'λ'),
    ("mu", 'μ'),
    ("nu", 'ν'),
    ("xi", 'ξ'),
    ("pi", 'π'),
    ("rho", 'ρ'),
    ("sigma", 'σ'),
    ("tau", 'τ'),
    ("upsilon", 'υ'),
    ("phi", 'φ'),
    ("chi", 'χ'),
    ("psi", 'ψ'),
    ("omega", 'ω'),
    ("Gamma", 'Γ'),
    ("Delta", 'Δ'),
    ("Theta", 'Θ'),
    ("Lambda", 'Λ'),
    ("Xi", 'Ξ'),
    ("Pi", 'Π'),
    ("Sigma", 'Σ'),
    ("Upsilon", 'Υ'),
    ("Phi", 'Φ'),
    ("Psi", 'Ψ'),
    ("Omega", 'Ω'),
];

/// A name of the model, as written and as set.
#[derive(Clone, Debug, PartialEq)]
pub(in crate::report) struct Name {
    /// The letters of the line.
    pub(super) base: String,
    /// What stands below, from left to right.
    pub(super) below: Vec<String>,
}

impl Name {
    /// Takes a name of a model apart: `sigma_S` has the base sigma and S below, `S0` and `S_0` the base S
    /// and 0 below. Where a model has both of these, they stay as they are written, so that two names never
    /// look the same.
    pub(in crate::report) fn new(pool: &Pool, name: &str) -> Self {
        let whole = || Self {
            base: name.to_owned(),
            below: Vec::new(),
        };
        let mut segments = name.split('_');
        let first = segments.next().unwrap_or_default();
        let letters = first.trim_end_matches(|c: char| c.is_ascii_digit());
        let digits = &first[letters.len()..];
        let below: Vec<&str> = segments.collect();
        if letters.is_empty() || below.iter().any(|part| part.is_empty()) {
            return whole();
        }
        let all_digits = |text: &str| text.bytes().all(|b| b.is_ascii_digit());
        let twin = match below.as_slice() {
            [] => format!("{letters}_{digits}"),
            [only] if digits.is_empty() && all_digits(only) => format!("{letters}{only}"),
            _ => String::new(),
        };
        if pool.find_symbol(&twin).is_some() || !below.is_empty() && !digits.is_empty() {
            return whole();
        }
        let digits = Some(digits).filter(|digits| !digits.is_empty());
        let below = digits.into_iter().chain(below);
        Self {
            base: letter(letters),
            below: below.map(letter).collect(),
        }
    }

    pub(super) fn width(&self) -> usize {
        let below: usize = self.below.iter().map(|b| b.chars().count()).sum();
        self.base.chars().count() + below * 2 / 3
    }
}

/// The Greek letter of that name, or the text itself.
fn letter(text: &str) -> String {
    let known = GREEK.iter().find(|(name, _)| *name == text);
    known.map_or_else(|| text.to_owned(), |(_, letter)| letter.to_string())
}

/// The name of a Greek letter.
pub(super) fn greek_name(letter: char) -> Option<&'static str> {
    let known = GREEK.iter().find(|(_, l)| *l == letter);
    known.map(|(name, _)| *name)
}

#[cfg(test)]
mod tests {
    use super::{Name, Pool};
    use crate::symbolic::SymbolKind;

    fn set(pool: &Pool, name: &str) -> (String, String) {
        let name = Name::new(pool, name);
        (name.base, name.below.join(","))
    }

    #[test]
    fn greek_letters_and_subscripts() {
        let pool = Pool::new();
        let is = |base: &str, below: &str| (base.to_owned(), below.to_owned());
        assert_eq!(set(&pool, "sigma"), is("σ", ""));
        assert_eq!(set(&pool, "S0"), is("S", "0"));
        assert_eq!(set(&pool, "sigma_12"), is("σ", "12"));
        assert_eq!(set(&pool, "sigma_S"), is("σ", "S"));
        assert_eq!(set(&pool, "u_theta_2"), is("u", "θ,2"));
        assert_eq!(set(&pool, "log_S"), is("log", "S"));
        assert_eq!(set(&pool, "price"), is("price", ""));
    }

    #[test]
    fn names_that_differ_look_different() {
        let pool = Pool::new();
        let names = ["S0", "S_0", "S0_", "S__0", "S_0_1", "S0_1", "S01", "S_01"];
        for name in names {
            pool.symbol(name, SymbolKind::Parameter);
        }
        for (i, a) in names.iter().enumerate() {
            for b in &names[i + 1..] {
                assert_ne!(set(&pool, a), set(&pool, b), "{a} and {b}");
            }
        }
    }
}
