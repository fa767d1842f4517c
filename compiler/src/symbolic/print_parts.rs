//! Long formulas as text: shared parts get names, so that the text grows with the number of distinct
//! parts and not with the formula written out.

use super::limit::Limit;
use super::node::Expr;
use super::pool::{Pool, Table};
use super::print::Piece;

/// Formulas that weigh more than this, a page or so, are written with named parts.
pub(super) const LONGEST_WHOLE: u64 = 2_000;

/// A part that is read only once has a name where its text would be longer than this.
pub(super) const LONGEST_UNNAMED: usize = 2_000;

/// A part that is read more than once has a name where it weighs more than this.
pub(super) const LIGHTEST_NAMED: u64 = 8;

impl Pool {
    /// The formula with named parts, cut at the budget; one that has more parts than that is only counted.
    pub(super) fn format_in_parts(&self, e: Expr) -> String {
        let parts = self.postorder(e);
        let budget = Limit::Printing.amount() as usize;
        if parts.len() > budget {
            self.exceed(Limit::Printing);
            return format!(
                "... (too long to print: the formula has {} distinct parts)",
                parts.len()
            );
        }
        let readers = self.readers(&parts);
        let mut pieces: Table<Expr, Piece> = Table::default();
        let (mut definitions, mut length) = (Vec::new(), 0);
        let mut count = 0;
        for &part in &parts {
            let mut piece = self.piece(part, &pieces);
            let shared = readers.get(&part).is_some_and(|&n| n > 1);
            let long = piece.text.len() > LONGEST_UNNAMED;
            if part != e && (long || shared && self.weight(part) > LIGHTEST_NAMED) {
                let name = self.free_name(&mut count);
                let definition = format!("{name} = {}", piece.alone());
                if length <= budget {
                    length += definition.len();
                    definitions.push(definition);
                }
                piece = Piece::atom(name);
            }
            pieces.insert(part, piece);
        }
        let mut text = pieces[&e].alone();
        if count > 0 {
            text = format!("{text} where {}", definitions.join("; "));
        }
        if text.len() <= budget && definitions.len() == count {
            return text;
        }
        self.exceed(Limit::Printing);
        let end = (0..=budget.min(text.len()))
            .rev()
            .find(|&end| text.is_char_boundary(end));
        format!(
            "{} ... (cut at {budget} characters; the formula has {} distinct parts)",
            &text[..end.unwrap_or(0)],
            parts.len()
        )
    }

    /// How often each part is read by others.
    pub(super) fn readers(&self, parts: &[Expr]) -> Table<Expr, usize> {
        let mut readers: Table<Expr, usize> = Table::default();
        for &part in parts {
            self.node(part)
                .for_each_child(|child| *readers.entry(child).or_insert(0) += 1);
        }
        readers
    }

    /// The next of the names p1, p2, ... that the model does not use.
    pub(super) fn free_name(&self, count: &mut usize) -> String {
        let mut letter = "p".to_owned();
        *count += 1;
        while self.find_symbol(&format!("{letter}{count}")).is_some() {
            letter.push('p');
        }
        format!("{letter}{count}")
    }
}
