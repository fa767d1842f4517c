//! Names as Unicode writes them: one form for each, and names that look alike.

use unicode_normalization::UnicodeNormalization;

/// The composed form (NFC) of a name: names that differ only in how their characters are composed are
/// one name.
pub(crate) fn composed(name: &str) -> String {
    name.nfc().collect()
}

/// What a name looks like: names with one appearance are easily taken for one another. Variants of a
/// letter (NFKC) look like the letter, except raised and lowered ones, which readers tell apart. The
/// pairs are some of those of Unicode Technical Standard 39 (confusables), from memory, without Greek
/// letters that people tell apart in formulas, such as rho and p.
pub(super) fn appearance(name: &str) -> String {
    let letters = name.chars().flat_map(|c| {
        let base = [c].into_iter().nfkc();
        if is_raised_or_lowered(c) {
            vec![c]
        } else {
            base.collect()
        }
    });
    letters.map(plain).collect()
}

/// Whether a letter stands above or below the line: the blocks of modifier letters, superscripts and
/// subscripts, and the two ordinal indicators.
fn is_raised_or_lowered(c: char) -> bool {
    matches!(c, '\u{aa}' | '\u{ba}' | '\u{2b0}'..='\u{2ff}' | '\u{1d2c}'..='\u{1d6a}'
        | '\u{1d78}' | '\u{1d9b}'..='\u{1dbf}' | '\u{2070}'..='\u{209f}' | '\u{2c7c}' | '\u{2c7d}')
}

/// The characters of a name with their numbers where they are not ASCII, to tell it from another that
/// looks the same: `U+03BC`.
pub(super) fn code_points(name: &str) -> String {
    let shown = name.chars().filter(|c| !c.is_ascii());
    let shown: Vec<String> = shown.map(|c| format!("U+{:04X}", u32::from(c))).collect();
    if shown.is_empty() {
        "ASCII letters".to_owned()
    } else {
        shown.join(" ")
    }
}

fn plain(c: char) -> char {
    const GROUPS: &[(char, &str)] = &[
        ('A', "ΑА"),
        ('B', "ΒВ"),
        ('C', "СϹ"),
        ('E', "ΕЕ"),
        ('H', "ΗН"),
        ('I', "ΙІ"),
        ('J', "Ј"),
        ('K', "ΚК"),
        ('M', "ΜМ"),
        ('N', "Ν"),
        ('O', "ΟО"),
        ('P', "ΡР"),
        ('S', "Ѕ"),
        ('T', "ΤТ"),
        ('X', "ΧХ"),
        ('Y', "ΥУ"),
        ('Z', "Ζ"),
        ('a', "а"),
        ('c', "сϲ"),
        ('e', "е"),
        ('i', "іı"),
        ('j', "јϳ"),
        ('o', "οо"),
        ('p', "р"),
        ('s', "ѕ"),
        ('v', "ν"),
        ('x', "х"),
        ('y', "у"),
    ];
    let group = GROUPS.iter().find(|(_, alike)| alike.contains(c));
    group.map_or(c, |(plain, _)| *plain)
}

#[cfg(test)]
mod tests {
    use super::{appearance, composed};

    #[test]
    fn composition_does_not_make_a_name() {
        assert_eq!(composed("e\u{301}tat"), "\u{e9}tat");
        assert_eq!(composed("\u{2126}"), "\u{3a9}");
    }

    #[test]
    fn look_alikes_have_one_appearance() {
        assert_eq!(appearance("\u{b5}_1"), appearance("\u{3bc}_1"));
        assert_eq!(appearance("\u{410}"), "A");
        assert_eq!(appearance("\u{1d70e}"), appearance("\u{3c3}"));
        assert_ne!(appearance("x\u{2090}"), appearance("xa"));
        assert_ne!(appearance("\u{3c1}"), appearance("p"));
        assert_ne!(appearance("S"), appearance("s"));
    }
}
