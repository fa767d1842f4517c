//! Long formulas as text for programs: every text parses, none is cut. What several formulas share, and
//! what is too long or too deep for one text, is written once under a name.

use std::cell::RefCell;

use super::node::Expr;
use super::pool::{Pool, Table};
use super::print::Piece;
use super::print_parts::{LIGHTEST_NAMED, LONGEST_UNNAMED, LONGEST_WHOLE};

/// Levels that one text nests: each takes at most three of the levels that the parser grants.
const DEEPEST: u32 = 60;

/// Writes formulas one after the other; what it has named it never writes out again.
///
/// ```
/// use driftwright::front::formula::parse_in_pool;
/// use driftwright::symbolic::{Pool, SharedTexts, SymbolKind};
/// let pool = Pool::new();
/// pool.symbol("x", SymbolKind::State);
/// let mut e = parse_in_pool(&pool, "sin(x) + x").unwrap();
/// for _ in 0..100 {
///     e = pool.add(pool.exp(e), pool.square(e));
/// }
/// let texts = SharedTexts::new(&pool, |_| false);
/// let text = texts.format(e);
/// assert!(parse_in_pool(&pool, &text).is_err(), "it reads names that are explained apart");
/// let definitions = texts.definitions();
/// assert_eq!(definitions[1].1, "exp(p1) + p1^2");
/// assert!(definitions.len() < 100, "one a level");
/// ```
pub struct SharedTexts<'a> {
    pool: &'a Pool,
    /// Names that stand for something else already.
    taken: Box<dyn Fn(&str) -> bool + 'a>,
    named: RefCell<Named>,
}

#[derive(Default)]
struct Named {
    /// Of each part that has one, its name.
    pieces: Table<Expr, Piece>,
    definitions: Vec<(String, String)>,
    count: usize,
}

impl<'a> SharedTexts<'a> {
    /// A writer that gives no part a name which is `taken`, or which is a symbol's.
    pub fn new(pool: &'a Pool, taken: impl Fn(&str) -> bool + 'a) -> Self {
        Self {
            pool,
            taken: Box::new(taken),
            named: RefCell::default(),
        }
    }

    /// The formula in the grammar of the model language. Names p1, p2, ... in it that are no symbols are
    /// among the [definitions](Self::definitions).
    pub fn format(&self, e: Expr) -> String {
        let pool = self.pool;
        if pool.weight(e) <= LONGEST_WHOLE && pool.depth(e) <= DEEPEST {
            return pool.format(e);
        }
        let named = &mut *self.named.borrow_mut();
        let new = pool.postorder_where(e, |part| !named.pieces.contains_key(&part));
        let readers = pool.readers(&new);
        // How deep the text of a part nests; a name does not.
        let mut levels: Table<Expr, u32> = Table::default();
        let mut unnamed = Vec::new();
        for &part in &new {
            let piece = pool.piece(part, &named.pieces);
            let mut level = 0;
            pool.node(part).for_each_child(|child| {
                level = level.max(1 + levels.get(&child).copied().unwrap_or(0));
            });
            let shared = readers.get(&part).is_some_and(|&n| n > 1);
            let long = piece.text.len() > LONGEST_UNNAMED || level >= DEEPEST;
            if part != e && (long || shared && pool.weight(part) > LIGHTEST_NAMED) {
                let name = self.free_name(&mut named.count);
                named.definitions.push((name.clone(), piece.alone()));
                named.pieces.insert(part, Piece::atom(name));
            } else {
                levels.insert(part, level);
                named.pieces.insert(part, piece);
                unnamed.push(part);
            }
        }
        let text = named.pieces[&e].alone();
        for part in unnamed {
            named.pieces.remove(&part);
        }
        text
    }

    /// The named parts, each before what reads it: name and formula.
    pub fn definitions(&self) -> Vec<(String, String)> {
        self.named.borrow().definitions.clone()
    }

    fn free_name(&self, count: &mut usize) -> String {
        loop {
            let name = self.pool.free_name(count);
            if !(self.taken)(&name) {
                return name;
            }
        }
    }
}
