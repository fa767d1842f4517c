//! Names as they are set: Greek letters for their names, subscripts for what stands behind an underscore
//! and for digits at the end.

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
    /// Takes a name apart: `sigma_S` has the base sigma and S below, `S0` the base S and 0 below. The
    /// parts behind an underscore stay apart, so that two names never look the same.
    pub(in crate::report) fn new(name: &str) -> Self {
        let mut segments = name.split('_');
        let first = segments.next().unwrap_or_default();
        let letters = first.trim_end_matches(|c: char| c.is_ascii_digit());
        let (base, digits) = first.split_at(letters.len());
        if base.is_empty() || segments.clone().any(str::is_empty) {
            return Self {
                base: name.to_owned(),
                below: Vec::new(),
            };
        }
        let mut below: Vec<String> = segments.map(letter).collect();
        if !digits.is_empty() && below.is_empty() {
            below.push(digits.to_owned());
            return Self {
                base: letter(base),
                below,
            };
        }
        // `S_0` beside `S0`: the underscore is shown, for what is told apart in the file must be here.
        if below.len() == 1 && below[0].chars().all(|c| c.is_ascii_digit()) {
            return Self {
                base: name.to_owned(),
                below: Vec::new(),
            };
        }
        Self {
            base: format!("{}{digits}", letter(base)),
            below,
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
    use super::Name;

    fn set(name: &str) -> (String, Option<String>) {
        let name = Name::new(name);
        let below = (!name.below.is_empty()).then(|| name.below.join(","));
        (name.base, below)
    }

    #[test]
    fn greek_letters_and_subscripts() {
        let is = |base: &str, below: &str| {
            (
                base.to_owned(),
                (!below.is_empty()).then(|| below.to_owned()),
            )
        };
        assert_eq!(set("sigma"), is("σ", ""));
        assert_eq!(set("S0"), is("S", "0"));
        assert_eq!(set("sigma_S"), is("σ", "S"));
        assert_eq!(set("u_theta_2"), is("u", "θ,2"));
        assert_eq!(set("log_S"), is("log", "S"));
        assert_eq!(set("price"), is("price", ""));
    }

    #[test]
    fn names_that_differ_look_different() {
        let names = ["S0", "S_0", "S0_", "S__0", "_S0", "S_0_1", "S0_1"];
        for (i, a) in names.iter().enumerate() {
            for b in &names[i + 1..] {
                assert_ne!(set(a), set(b), "{a} and {b}");
            }
        }
        // A Greek letter typed as such is that letter.
        assert_eq!(set("σ"), set("sigma"));
    }
}
