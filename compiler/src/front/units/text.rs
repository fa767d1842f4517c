//! Units as authors write them: `EUR/t`, `1/year^(1/2)`, `million crowns/year`, `kg m²`.
//!
//! ```text
//! unit   = words (("*" | "/" | "per") words)*
//! words  = power power*                        side by side: a product that binds tighter than "/"
//! power  = ("sqrt"? "(" unit ")" | symbol) ("^" exponent)?
//! ```
//! A symbol is any run of other characters. `1` and `rad` are pure numbers; every other number is an
//! opaque symbol like a word, so that `100 g` is not `g`.

use super::dimension::{Atom, Dimension};
use crate::front::formula::decimal;
use crate::symbolic::Rational;

/// Levels of parentheses a unit may have.
const MAX_DEPTH: usize = 20;

/// Largest exponent, so that exponents stay small numbers.
const MAX_EXPONENT: i64 = 1000;

/// Reads a unit; the empty text and `-` are pure numbers. `None` where it cannot be read.
pub(super) fn parse(text: &str) -> Option<Dimension> {
    if matches!(text.trim(), "" | "-") {
        return Some(Dimension::one());
    }
    let mut reader = Reader {
        rest: text.trim_start(),
        depth: 0,
    };
    let dimension = reader.unit()?;
    reader.rest.is_empty().then_some(dimension)
}

struct Reader<'a> {
    rest: &'a str,
    depth: usize,
}

impl<'a> Reader<'a> {
    fn unit(&mut self) -> Option<Dimension> {
        let mut result = self.words()?;
        loop {
            let exponent = if self.take(&["*", "·", "⋅", "×"]) {
                Rational::ONE
            } else if self.take(&["/"]) || self.take_word("per") {
                -Rational::ONE
            } else {
                return Some(result);
            };
            let next = self.words()?;
            result.multiply(&next, &exponent);
        }
    }

    fn words(&mut self) -> Option<Dimension> {
        let mut result = self.power()?;
        while !self.rest.is_empty()
            && !self.rest.starts_with(['*', '·', '⋅', '×', '/', ')'])
            && self.word() != "per"
        {
            result.multiply(&self.power()?, &Rational::ONE);
        }
        Some(result)
    }

    fn power(&mut self) -> Option<Dimension> {
        let root = self.word() == "sqrt" && self.rest["sqrt".len()..].starts_with('(');
        if root {
            self.rest = &self.rest["sqrt".len()..];
        }
        let base = if self.take(&["("]) {
            self.depth += 1;
            let inner = (self.depth <= MAX_DEPTH).then(|| self.unit())??;
            self.depth -= 1;
            self.take(&[")"]).then_some(inner)?
        } else {
            self.symbol()?
        };
        let exponent = self.exponent()?;
        let half = Rational::from_parts(1.into(), 2u8.into());
        Some(base.power(&if root { exponent * half } else { exponent }))
    }

    fn symbol(&mut self) -> Option<Dimension> {
        let word = self.word();
        self.rest = self.rest[word.len()..].trim_start();
        match word {
            "" => None,
            "1" | "rad" => Some(Dimension::one()),
            _ => Some(Dimension::atom(Atom::Unit(word.into()))),
        }
    }

    /// The characters up to the next operator.
    fn word(&self) -> &'a str {
        let stop = |c: char| {
            c.is_whitespace()
                || "*·⋅×/^()".contains(c)
                || superscript(c).is_some()
                || c.is_control()
        };
        &self.rest[..self.rest.find(stop).unwrap_or(self.rest.len())]
    }

    fn exponent(&mut self) -> Option<Rational> {
        let raised: String = self.rest.chars().map_while(superscript).collect();
        if !raised.is_empty() {
            let length: usize = self
                .rest
                .chars()
                .take(raised.chars().count())
                .map(char::len_utf8)
                .sum();
            self.rest = self.rest[length..].trim_start();
            return signed(&raised);
        }
        if !self.take(&["^"]) {
            return Some(Rational::ONE);
        }
        if self.take(&["("]) {
            let end = self.rest.find(')')?;
            let inner = &self.rest[..end];
            self.rest = self.rest[end + 1..].trim_start();
            return match inner.split_once('/') {
                None => signed(inner.trim()),
                Some((above, below)) => {
                    let below = signed(below.trim())?;
                    if below == Rational::ZERO {
                        return None;
                    }
                    Some(signed(above.trim())? / below)
                }
            };
        }
        let end = self
            .rest
            .find(|c: char| !c.is_ascii_digit() && !"+-.".contains(c));
        let exponent = signed(&self.rest[..end.unwrap_or(self.rest.len())])?;
        self.rest = self.rest[end.unwrap_or(self.rest.len())..].trim_start();
        // `year^1/2` is meant as a root and would be read as half a power: the author must say.
        let ambiguous = self
            .rest
            .strip_prefix('/')
            .is_some_and(|after| after.trim_start().starts_with(|c: char| c.is_ascii_digit()));
        (!ambiguous).then_some(exponent)
    }

    fn take(&mut self, signs: &[&str]) -> bool {
        let after = signs.iter().find_map(|sign| self.rest.strip_prefix(sign));
        if let Some(after) = after {
            self.rest = after.trim_start();
        }
        after.is_some()
    }

    fn take_word(&mut self, word: &str) -> bool {
        let found = self.word() == word;
        if found {
            self.rest = self.rest[word.len()..].trim_start();
        }
        found
    }
}

/// The plain character of a raised digit or sign.
fn superscript(c: char) -> Option<char> {
    Some(match c {
        '⁰' => '0',
        '¹' => '1',
        '²' => '2',
        '³' => '3',
        '⁴'..='⁹' => char::from(b'4' + u8::try_from(u32::from(c) - u32::from('⁴')).ok()?),
        '⁻' => '-',
        _ => return None,
    })
}

/// A whole number or decimal with its sign, of a size that exponents have.
fn signed(text: &str) -> Option<Rational> {
    let (negative, digits) = match text.strip_prefix('-') {
        Some(digits) => (true, digits),
        None => (false, text.strip_prefix('+').unwrap_or(text)),
    };
    let value = decimal(digits).ok()?;
    let value = (value <= Rational::from(MAX_EXPONENT)).then_some(value)?;
    Some(if negative { -value } else { value })
}

#[cfg(test)]
mod tests {
    use super::parse;

    fn shown(text: &str) -> String {
        parse(text).map_or("unreadable".to_owned(), |dimension| {
            dimension.show(&|number| format!("?{number}"))
        })
    }

    #[test]
    fn units_are_read_as_people_write_them() {
        let cases = [
            ("EUR/t", "EUR/t"),
            ("1/year^(1/2)", "1/year^(1/2)"),
            ("K/hour^(1/2)", "K/hour^(1/2)"),
            ("EUR/MWh/week^(1/2)", "EUR/(MWh*week^(1/2))"),
            ("1/million crowns", "1/(crowns*million)"),
            ("million crowns/year", "crowns*million/year"),
            ("kg m^2/s^2", "kg*m^2/s^2"),
            ("kg·m²·s⁻²", "kg*m^2/s^2"),
            ("m s^-1", "m/s"),
            ("crowns per year", "crowns/year"),
            ("m/sqrt(day)", "m/day^(1/2)"),
            ("(m/s)^(-1/2)", "s^(1/2)/m^(1/2)"),
            ("year^0.5", "year^(1/2)"),
            ("rad/s", "1/s"),
            ("m/m", "a pure number"),
            ("1", "a pure number"),
            ("", "a pure number"),
            ("-", "a pure number"),
            ("%", "%"),
            ("100 g", "100*g"),
        ];
        for (text, expected) in cases {
            assert_eq!(shown(text), expected, "{text}");
        }
    }

    #[test]
    fn what_cannot_be_read_is_not_guessed() {
        for text in [
            "EUR/", "(m", "m)", "m^", "m^x", "year^1/2", "m^(1/0)", "/", "m^10000", "*m",
        ] {
            assert_eq!(shown(text), "unreadable", "{text}");
        }
    }

    #[test]
    fn what_is_shown_reads_back() {
        for text in ["EUR/t", "K/hour^(1/2)", "a b/c d^3", "(m/s)^(-7/2)"] {
            let once = shown(text);
            assert_eq!(shown(&once), once);
        }
    }
}
