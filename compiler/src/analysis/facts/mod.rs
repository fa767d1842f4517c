//! Facts about a model that reviewers ask for: ends of domains, explosion, growth, commuting noise, martingales,
//! moments; each with the condition in the author's own parameters on which it hangs.
//!
//! A fact is a statement that is true if and only if its condition holds. Ranges and assumptions imply the condition,
//! contradict it or leave it open; where it is open, a run checks it at the values it is given.

mod coefficients;
mod ends;
mod martingale;

use super::condition::{self, All, Standing};
use super::moments::Moments;
use crate::calculus::{Dynamics, System};
use crate::model::Model;
use crate::symbolic::SymbolKind;

/// What a fact is about.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Topic {
    /// Whether a finite end of a domain is attained.
    Boundary,
    /// Whether a state comes to infinity in finite time.
    Explosion,
    /// How fast coefficients grow.
    Growth,
    /// Whether the order of the drivers' increments within a step matters.
    Commutativity,
    /// Whether a local martingale is a true one.
    Martingale,
    /// Whether moments solve a closed system.
    Moments,
}

impl Topic {
    /// The name in JSON.
    pub fn name(self) -> &'static str {
        match self {
            Self::Boundary => "boundary",
            Self::Explosion => "explosion",
            Self::Growth => "growth",
            Self::Commutativity => "commutativity",
            Self::Martingale => "martingale",
            Self::Moments => "moments",
        }
    }
}

/// A statement, and when it is true.
#[derive(Clone, Debug)]
pub struct Fact {
    /// What it is about.
    pub topic: Topic,
    /// The states it speaks of, by their indices.
    pub states: Vec<usize>,
    /// The statement, in words.
    pub statement: String,
    /// What follows from ranges and assumptions.
    pub standing: Standing,
    /// The statement is true if and only if all conditions of one alternative hold; none where no condition is known.
    /// Conditions that ranges and assumptions settle are left out beside others that they do not.
    pub condition: Option<Vec<All>>,
    /// For ends: the classes they may have, and when.
    pub classes: Vec<(&'static str, All)>,
    /// The rule behind it, or what was in the way.
    pub because: String,
}

impl Fact {
    /// The condition as text; none where no condition is known or nothing depends on parameters.
    pub fn condition_text(&self, model: &Model) -> Option<String> {
        let alternatives = self.condition.as_ref()?;
        let unconditional = alternatives.iter().all(Vec::is_empty);
        (!unconditional).then(|| condition::format(&model.pool, alternatives))
    }

    /// The alternatives to be checked at the values of a run: where the condition is open and in the parameters alone.
    pub fn to_check(&self, model: &Model) -> Option<&[All]> {
        let alternatives = self.condition.as_deref()?;
        let parameters = |e| {
            let symbols = model.pool.symbols_of(e);
            let kind = |&s: &_| model.pool.symbol_kind(s) == SymbolKind::Parameter;
            symbols.iter().all(kind)
        };
        let fixed = alternatives
            .iter()
            .flatten()
            .all(|c| parameters(c.left) && parameters(c.right));
        (self.standing == Standing::Open && fixed).then_some(alternatives)
    }
}

/// The facts of a model, by topic and then in the order of the states.
pub fn find(model: &Model, dynamics: &Dynamics, moments: &Moments) -> Vec<Fact> {
    let found = Finder {
        model,
        dynamics,
        moments,
        system: System::of(model, dynamics),
    };
    let mut facts = found.ends();
    facts.extend(found.explosions());
    facts.extend(found.growth());
    facts.extend(found.commutativity());
    facts.extend(found.martingales());
    facts.extend(found.closed_moments());
    facts
}

/// What the finders of the single topics need.
struct Finder<'a> {
    model: &'a Model,
    dynamics: &'a Dynamics,
    moments: &'a Moments,
    system: System<'a>,
}

impl Finder<'_> {
    fn name(&self, state: usize) -> &str {
        &self.model.states[state].name
    }

    /// The names of states, as a list in words.
    fn names(&self, states: &[usize]) -> String {
        let names: Vec<&str> = states.iter().map(|&i| self.name(i)).collect();
        match names.split_last() {
            Some((last, [_, ..])) => {
                format!("{} and {last}", names[..names.len() - 1].join(", "))
            }
            _ => names.join(""),
        }
    }
}

/// A fact without a condition in the parameters.
fn plain(
    topic: Topic,
    states: Vec<usize>,
    statement: String,
    standing: Standing,
    because: impl Into<String>,
) -> Fact {
    let condition = match standing {
        Standing::Implied => Some(vec![All::new()]),
        Standing::Contradicted => Some(Vec::new()),
        Standing::Open => None,
    };
    Fact {
        topic,
        states,
        statement,
        standing,
        condition,
        classes: Vec::new(),
        because: because.into(),
    }
}
