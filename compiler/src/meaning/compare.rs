//! Two meanings side by side, by proof.

use std::collections::{BTreeMap, BTreeSet};

use super::entries::{Entry, Meaning, Value};
use crate::front::formula::{Ast, IntervalEnd, parse_in_pool, parse_interval};
use crate::front::text::MappedText;
use crate::model::Model;
use crate::symbolic::{Bound, Expr, Pool, SharedTexts, Symbol, SymbolKind, Truth};

/// Old names without a counterpart of which every order is tried as a renaming.
const MOST_PERMUTED: usize = 4;

/// Renamings tried in all; beyond them the names count as renamed in the order of the file.
const MOST_RENAMINGS: usize = 48;

/// What became of a model.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Comparison {
    /// Names that changed and nothing else with them: before and after.
    pub renamed: Vec<(String, String)>,
    /// What changed in meaning.
    pub changes: Vec<Change>,
}

/// One entry that does not mean what it did.
#[derive(Clone, Debug, PartialEq)]
pub struct Change {
    /// The key of the entry, joined by dots, in the new names.
    pub key: String,
    /// How it changed.
    pub kind: Kind,
}

/// How an entry changed.
#[derive(Clone, Debug, PartialEq)]
pub enum Kind {
    /// It was not there.
    Added(Value),
    /// It is no longer there.
    Removed(Value),
    /// It says something else.
    Changed {
        /// What it said.
        old: Value,
        /// What it says.
        new: Value,
        /// New less old, for formulas.
        difference: Option<String>,
        /// Whether the difference is proved: else it could not be told.
        proved: bool,
    },
}

impl Comparison {
    /// Whether nothing changed in meaning.
    pub fn is_same(&self) -> bool {
        self.changes.is_empty()
    }

    /// A formula of the earlier version as one of the new model's pool, old names replaced; none where it
    /// has names that the new model does not know.
    pub fn translated(&self, pool: &Pool, old: &Pool, e: Expr) -> Option<Expr> {
        let texts = SharedTexts::new(old, |name| pool.find_symbol(name).is_some());
        let text = texts.format(e);
        let meaning = Meaning {
            parts: texts.definitions(),
            ..Meaning::default()
        };
        let renaming = self.renamed.iter().cloned().collect();
        Reader::new(pool, &meaning, &renaming).read(&text)
    }
}

/// Holds the meaning of an earlier version against a model.
///
/// Formulas are compared by the zero test, under the ranges of the new model. Names that are gone are
/// tried as old names of new ones: where all entries agree under a renaming, it is one.
pub fn compare(old: &Meaning, model: &Model) -> Comparison {
    let new = Meaning::of(model);
    let plain = differences(old, &new, model, &BTreeMap::new());
    if plain.is_empty() {
        return Comparison::default();
    }
    // The renaming that leaves the fewest changes; at equal numbers none, then the order of the file.
    let mut best = (BTreeMap::new(), plain);
    for renaming in renamings(old, &new) {
        let changes = differences(old, &new, model, &renaming);
        if changes.len() < best.1.len() && is_supported(old, &changes, &renaming) {
            best = (renaming, changes);
        }
        if best.1.is_empty() {
            break;
        }
    }
    Comparison {
        renamed: best.0.into_iter().collect(),
        changes: best.1,
    }
}

/// Maps from names that are gone to names that are new, of the same kind.
fn renamings(old: &Meaning, new: &Meaning) -> Vec<BTreeMap<String, String>> {
    let mut maps = vec![BTreeMap::new()];
    for (before, after) in old.names.iter().zip(&new.names) {
        let without = |these: &[String], those: &[String]| -> Vec<String> {
            let gone = these.iter().filter(|name| !those.contains(name));
            gone.cloned().collect()
        };
        let (gone, come) = (without(before, after), without(after, before));
        if gone.len() != come.len() || gone.is_empty() {
            continue;
        }
        let mut orders = vec![come];
        if gone.len() <= MOST_PERMUTED {
            let all = permutations(&orders[0]);
            if all.len() * maps.len() <= MOST_RENAMINGS {
                orders = all;
            }
        }
        let extended = maps.iter().flat_map(|map| {
            orders.iter().map(|order| {
                let mut map: BTreeMap<String, String> = map.clone();
                map.extend(gone.iter().cloned().zip(order.iter().cloned()));
                map
            })
        });
        maps = extended.collect();
    }
    maps.retain(|map| !map.is_empty());
    maps
}

/// Whether each renamed name stands in a formula that agrees under the renaming: else it is a guess.
fn is_supported(old: &Meaning, changes: &[Change], renaming: &BTreeMap<String, String>) -> bool {
    let changed: BTreeSet<&str> = changes.iter().map(|c| c.key.as_str()).collect();
    let agreeing: Vec<&Entry> = old
        .entries
        .iter()
        .filter(|entry| !changed.contains(key(entry, renaming).join(".").as_str()))
        .collect();
    let mentions = |entry: &Entry, name: &str| match &entry.value {
        Value::Formula(text) => words(text).any(|word| word == name),
        Value::Interval(_) | Value::Word(_) => false,
    };
    let is_key = |entry: &Entry, name: &str| {
        entry.key[0] != "parameters" && entry.key.iter().skip(1).any(|part| part == name)
    };
    renaming.keys().all(|name| {
        let mut entries = agreeing.iter();
        entries.any(|entry| mentions(entry, name) || is_key(entry, name))
    })
}

/// The names and numbers in the text of a formula.
fn words(text: &str) -> impl Iterator<Item = &str> {
    text.split(|c: char| !(c.is_alphanumeric() || c == '_'))
}

/// All orders, the given one first.
fn permutations(items: &[String]) -> Vec<Vec<String>> {
    let Some(last) = items.len().checked_sub(1) else {
        return vec![Vec::new()];
    };
    let mut all = Vec::new();
    for i in 0..=last {
        let mut rest = items.to_vec();
        let first = rest.remove(i);
        for mut order in permutations(&rest) {
            order.insert(0, first.clone());
            all.push(order);
        }
    }
    all
}

/// The entries that differ once the old names are replaced.
fn differences(
    old: &Meaning,
    new: &Meaning,
    model: &Model,
    renaming: &BTreeMap<String, String>,
) -> Vec<Change> {
    let (before, after) = (
        Reader::new(&model.pool, old, renaming),
        Reader::new(&model.pool, new, &BTreeMap::new()),
    );
    let renamed: BTreeMap<Vec<String>, &Entry> = old
        .entries
        .iter()
        .map(|entry| (key(entry, renaming), entry))
        .collect();
    let mut changes = Vec::new();
    let mut met = BTreeSet::new();
    for entry in &new.entries {
        let kind = match renamed.get(&entry.key) {
            None => Some(Kind::Added(entry.value.clone())),
            Some(earlier) => {
                met.insert(entry.key.clone());
                changed(&before, &earlier.value, &after, &entry.value)
            }
        };
        let key = entry.key.join(".");
        changes.extend(kind.map(|kind| Change { key, kind }));
    }
    for (key, entry) in &renamed {
        if !met.contains(key) {
            let kind = Kind::Removed(before.shown(&entry.value));
            let key = key.join(".");
            changes.push(Change { key, kind });
        }
    }
    changes
}

/// The key in the new names; the two drivers of a correlation stand in the order of the alphabet.
fn key(entry: &Entry, renaming: &BTreeMap<String, String>) -> Vec<String> {
    let mut key = entry.key.clone();
    // Which parts are names of parameters, states and drivers; the others are words of the language.
    let names: &[usize] = match key[0].as_str() {
        "parameters" => &[1],
        "states" if key.get(2).is_some_and(|part| part == "diffusion") => &[1, 3],
        "states" => &[1],
        "correlation" => &[1, 2],
        "claims" => &[3],
        _ => &[],
    };
    for &i in names {
        if let Some(new) = key.get(i).and_then(|part| renaming.get(part)) {
            key[i].clone_from(new);
        }
    }
    if key[0] == "correlation" {
        key[1..].sort();
    }
    key
}

/// None where both say the same.
fn changed(before: &Reader<'_>, old: &Value, after: &Reader<'_>, new: &Value) -> Option<Kind> {
    let pool = after.pool;
    let (difference, proved) = match (old, new) {
        (Value::Word(a), Value::Word(b)) if a == b => return None,
        (Value::Formula(a), Value::Formula(b)) => match (before.read(a), after.read(b)) {
            (Some(a), Some(b)) if a == b => return None,
            (Some(a), Some(b)) => {
                let difference = pool.simplify(pool.sub(b, a));
                match pool.equal(a, b) {
                    Truth::Yes => return None,
                    Truth::No(_) => (Some(pool.format(difference)), true),
                    Truth::CannotTell => (Some(pool.format(difference)), false),
                }
            }
            _ => (None, false),
        },
        (Value::Interval(a), Value::Interval(b)) => match (before.ends(a), after.ends(b)) {
            (Some(a), Some(b)) => {
                let verdicts = a.iter().zip(&b).map(|(a, b)| same_end(pool, a, b));
                match verdicts.max() {
                    None | Some(Same::Proved) => return None,
                    Some(unlike) => (None, unlike == Same::Refuted),
                }
            }
            _ => (None, false),
        },
        _ => (None, true),
    };
    Some(Kind::Changed {
        old: before.shown(old),
        new: new.clone(),
        difference,
        proved,
    })
}

/// Whether two ends of intervals are one, from the best to the worst.
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Same {
    Proved,
    CannotTell,
    Refuted,
}

fn same_end(pool: &Pool, a: &Bound, b: &Bound) -> Same {
    match (a, b) {
        (Bound::Infinite, Bound::Infinite) => Same::Proved,
        (&Bound::Open(a), &Bound::Open(b)) | (&Bound::Closed(a), &Bound::Closed(b)) => {
            match pool.equal(a, b) {
                Truth::Yes => Same::Proved,
                Truth::No(_) => Same::Refuted,
                Truth::CannotTell => Same::CannotTell,
            }
        }
        _ => Same::Refuted,
    }
}

/// Reads formulas of one meaning into the pool of the new model.
struct Reader<'a> {
    pool: &'a Pool,
    /// Named parts, and symbols that have another name now.
    replaced: BTreeMap<Symbol, Expr>,
}

impl<'a> Reader<'a> {
    fn new(pool: &'a Pool, meaning: &Meaning, renaming: &BTreeMap<String, String>) -> Self {
        let symbol = |name: &str| {
            let known = pool.find_symbol(name);
            known.unwrap_or_else(|| pool.symbol(name, SymbolKind::Auxiliary))
        };
        for name in meaning.names.iter().flatten() {
            symbol(name);
        }
        let replaced = renaming.iter();
        let replaced = replaced.map(|(old, new)| (symbol(old), pool.var(symbol(new))));
        let mut reader = Self {
            pool,
            replaced: replaced.collect(),
        };
        for (name, text) in &meaning.parts {
            if let Some(part) = reader.read(text) {
                reader.replaced.insert(symbol(name), part);
            }
        }
        reader
    }

    fn read(&self, text: &str) -> Option<Expr> {
        let formula = parse_in_pool(self.pool, text).ok()?;
        Some(self.pool.substitute(formula, &self.replaced))
    }

    /// The ends of an interval.
    fn ends(&self, text: &str) -> Option<[Bound; 2]> {
        let read = parse_interval(&MappedText::plain(text, 0)).ok()?;
        let place = |ast: &Ast| self.read(&text[ast.span.start..ast.span.end]);
        let end = |end: &IntervalEnd| {
            Some(match end {
                IntervalEnd::Infinite => Bound::Infinite,
                IntervalEnd::Open(ast) => Bound::Open(place(ast)?),
                IntervalEnd::Closed(ast) => Bound::Closed(place(ast)?),
            })
        };
        Some([end(&read.lower)?, end(&read.upper)?])
    }

    /// A value in the new names.
    fn shown(&self, value: &Value) -> Value {
        match value {
            Value::Formula(text) if !self.replaced.is_empty() => match self.read(text) {
                Some(e) => Value::Formula(self.pool.format(e)),
                None => value.clone(),
            },
            other => other.clone(),
        }
    }
}
