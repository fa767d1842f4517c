//! Breaking lines: words at spaces, formulas before their operators.

/// Columns of a text on a terminal: characters, without the terminal's escape sequences.
pub(super) fn width(text: &str) -> usize {
    let mut count = 0;
    let mut escaped = false;
    for c in text.chars() {
        match c {
            '\u{1b}' => escaped = true,
            'm' if escaped => escaped = false,
            _ if escaped => {}
            _ => count += 1,
        }
    }
    count
}

/// Breaks running text at spaces; a word longer than a line stays whole. Blank lines and line ends of
/// the author count as spaces, so that indented text of a model file reads well.
pub(super) fn words(text: &str, columns: usize) -> Vec<String> {
    greedy(text.split_whitespace().map(str::to_owned), columns)
}

fn greedy(pieces: impl Iterator<Item = String>, columns: usize) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    for piece in pieces {
        match lines.last_mut() {
            Some(line) if width(line) + 1 + width(&piece) <= columns => {
                line.push(' ');
                line.push_str(&piece);
            }
            _ => lines.push(piece),
        }
    }
    if lines.is_empty() {
        lines.push(String::new());
    }
    lines
}

/// Breaks a formula: before its equality signs, then before its operators, outside brackets where that
/// suffices.
pub(super) fn formula(text: &str, columns: usize) -> Vec<String> {
    if width(text) <= columns {
        return vec![text.to_owned()];
    }
    let mut sides = text.split(" = ");
    let first = sides.next().unwrap_or("");
    let others = sides.map(|side| format!("= {side}"));
    std::iter::once(first.to_owned())
        .chain(others)
        .flat_map(|side| sum(&side, columns))
        .collect()
}

/// Breaks one side of an equation.
fn sum(text: &str, columns: usize) -> Vec<String> {
    if width(text) <= columns {
        return vec![text.to_owned()];
    }
    let outer = greedy(operands(text, 0).into_iter(), columns);
    if outer.iter().all(|line| width(line) <= columns) {
        return outer;
    }
    greedy(operands(text, usize::MAX).into_iter(), columns)
}

/// The formula cut before each spaced `+` or `-` that stands at most `depth` brackets deep.
fn operands(text: &str, depth: usize) -> Vec<String> {
    let mut pieces = vec![String::new()];
    let mut level = 0_usize;
    let words: Vec<&str> = text.split(' ').collect();
    for (i, word) in words.iter().enumerate() {
        let operator = matches!(*word, "+" | "-") && i > 0;
        if operator && level <= depth {
            pieces.push((*word).to_owned());
        } else if let Some(piece) = pieces.last_mut() {
            if !piece.is_empty() {
                piece.push(' ');
            }
            piece.push_str(word);
        }
        level += word.matches('(').count();
        level = level.saturating_sub(word.matches(')').count());
    }
    pieces
}

/// Narrows the widest columns of words until the row fits; columns of numbers (`fixed`) keep their
/// width, since a number that is broken in two is hard to read.
pub(super) fn fit(widths: &mut [usize], fixed: &[bool], columns: usize, gap: usize) {
    const NARROWEST: usize = 10;
    loop {
        let total: usize = widths.iter().map(|w| w + gap).sum();
        let words = widths
            .iter_mut()
            .zip(fixed)
            .filter(|(_, fixed)| !**fixed)
            .map(|(w, _)| w);
        let Some(widest) = words.max() else { return };
        if total <= columns + gap || *widest <= NARROWEST {
            return;
        }
        *widest -= 1;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn formulas_break_before_operators_outside_brackets_first() {
        let lines = formula("alpha*(b + c) + beta*(d - e) - gamma", 16);
        assert_eq!(lines, ["alpha*(b + c)", "+ beta*(d - e)", "- gamma"]);
        assert_eq!(formula("f(a + b + c + d)", 8), ["f(a + b", "+ c + d)"]);
        assert_eq!(formula("a + b + c = d", 9), ["a + b + c", "= d"]);
    }

    #[test]
    fn escape_sequences_take_no_columns() {
        assert_eq!(width("\u{1b}[1;31mσ_x\u{1b}[0m"), 3);
    }

    #[test]
    fn the_widest_column_gives_way() {
        let mut widths = [10, 70, 20, 40];
        fit(&mut widths, &[false, false, false, true], 110, 2);
        assert_eq!(widths.iter().map(|w| w + 2).sum::<usize>(), 112);
        assert_eq!([widths[0], widths[2], widths[3]], [10, 20, 40]);
    }
}
