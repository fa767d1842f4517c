//! What changed in meaning between two versions of a model, and what follows from it.

use serde_json::{Map, Value as Json, json};

use super::document::{Align, Inline, Mark, Table, Text, code, words};
use super::{Document, methods};
use crate::meaning::{Change, Comparison, Kind, Value};
use crate::pipeline::Compiled;
use crate::symbolic::Expr;

/// Something derived that is not what it was.
#[derive(Clone, Debug, PartialEq)]
pub struct Effect {
    /// What it is, in words.
    pub what: String,
    /// Of which state, quantity or claim.
    pub of: String,
    /// Before; none where it was not there.
    pub old: Option<Value>,
    /// Now; none where it is gone.
    pub new: Option<Value>,
}

/// The derived facts that differ: Ito drifts and corrections, methods, verdicts, means and variances.
pub fn effects(old: &Compiled, new: &Compiled, comparison: &Comparison) -> Vec<Effect> {
    let search = Search {
        old,
        new,
        comparison,
    };
    let mut effects = search.states();
    effects.extend(search.derived());
    effects.extend(search.methods());
    effects.extend(search.verdicts());
    effects
}

struct Search<'a> {
    old: &'a Compiled,
    new: &'a Compiled,
    comparison: &'a Comparison,
}

impl Search<'_> {
    /// The name that something of the old model has now.
    fn renamed<'n>(&'n self, name: &'n str) -> &'n str {
        let renamed = &self.comparison.renamed;
        let known = renamed.iter().find(|(old, _)| old == name);
        known.map_or(name, |(_, new)| new)
    }

    /// The effect on a formula, if it is not proved to be the same.
    fn formula(
        &self,
        what: &str,
        of: &str,
        old: Option<Expr>,
        new: Option<Expr>,
    ) -> Option<Effect> {
        let (before, now) = (&self.old.model.pool, &self.new.model.pool);
        if let (Some(a), Some(b)) = (old, new)
            && let Some(a) = self.comparison.translated(now, before, a)
            && (a == b || now.equal(a, b).is_yes())
        {
            return None;
        }
        (old.is_some() || new.is_some()).then(|| Effect {
            what: what.to_owned(),
            of: of.to_owned(),
            old: old.map(|e| Value::Formula(before.format(e))),
            new: new.map(|e| Value::Formula(now.format(e))),
        })
    }

    fn states(&self) -> Vec<Effect> {
        let mut effects = Vec::new();
        for (i, state) in self.new.model.states.iter().enumerate() {
            let states = &self.old.model.states;
            let Some(j) = states
                .iter()
                .position(|s| self.renamed(&s.name) == state.name)
            else {
                continue;
            };
            let (was, is) = (&states[j], state);
            let pools = (&self.old.model.pool, &self.new.model.pool);
            let (was, is) = (pools.0.var(was.symbol), pools.1.var(is.symbol));
            let of = [
                (
                    "Ito drift",
                    Some(self.old.dynamics.states[j].drift),
                    Some(self.new.dynamics.states[i].drift),
                ),
                (
                    "mean",
                    self.old.moments.mean(was).map(|m| m.value),
                    self.new.moments.mean(is).map(|m| m.value),
                ),
                (
                    "variance",
                    self.old.moments.variance(was).map(|m| m.value),
                    self.new.moments.variance(is).map(|m| m.value),
                ),
            ];
            effects.extend(
                of.into_iter()
                    .filter_map(|(what, a, b)| self.formula(what, &state.name, a, b)),
            );
        }
        effects
    }

    fn derived(&self) -> Vec<Effect> {
        let mut effects = Vec::new();
        let olds = self
            .old
            .model
            .derived
            .iter()
            .zip(&self.old.dynamics.derived);
        let news = self
            .new
            .model
            .derived
            .iter()
            .zip(&self.new.dynamics.derived);
        for (quantity, is) in news {
            let Some((_, was)) = olds.clone().find(|(q, _)| q.name == quantity.name) else {
                continue;
            };
            let of = [
                ("drift", was.drift, is.drift),
                ("Ito correction", was.ito_correction, is.ito_correction),
            ];
            effects.extend(
                of.into_iter().filter_map(|(what, a, b)| {
                    self.formula(what, &quantity.name, Some(a), Some(b))
                }),
            );
        }
        effects
    }

    fn methods(&self) -> Vec<Effect> {
        let line = |of: &Compiled, state: usize| {
            let group = of.plan.groups.iter().find(|g| g.states.contains(&state));
            group.map(|g| Value::Word(methods::method_line(&of.model, &of.plan, g)))
        };
        let mut effects = Vec::new();
        for (i, state) in self.new.model.states.iter().enumerate() {
            let states = &self.old.model.states;
            let was = states
                .iter()
                .position(|s| self.renamed(&s.name) == state.name);
            let (old, new) = (was.and_then(|j| line(self.old, j)), line(self.new, i));
            // A name in the line that is only renamed is no effect.
            if was.is_some() && old != new && self.comparison.renamed.is_empty() {
                let (what, of) = ("method".to_owned(), state.name.clone());
                effects.push(Effect { what, of, old, new });
            }
        }
        effects
    }

    fn verdicts(&self) -> Vec<Effect> {
        let verdicts = |of: &Compiled| -> Vec<(String, &'static str)> {
            let claims = of.model.claims.iter().zip(&of.claims);
            claims
                .map(|(claim, result)| (claim.name.clone(), result.verdict.name()))
                .collect()
        };
        let before = verdicts(self.old);
        let now = verdicts(self.new).into_iter();
        now.filter_map(|(name, verdict)| {
            let (_, was) = before.iter().find(|(old, _)| *old == name)?;
            (*was != verdict).then(|| Effect {
                what: "verdict".to_owned(),
                of: name,
                old: Some(Value::Word((*was).to_owned())),
                new: Some(Value::Word(verdict.to_owned())),
            })
        })
        .collect()
    }
}

/// The comparison as a document.
pub fn comparison(
    old: &Compiled,
    new: &Compiled,
    found: &Comparison,
    versions: [&str; 2],
) -> Document {
    let title = format!("Changes of {}", new.model.name);
    let subtitle = format!("from {} to {}", versions[0], versions[1]);
    let mut document = Document::new(&new.model.pool, title, subtitle);
    if found.is_same() {
        let mut text = vec![Inline::Marked(Mark::Good, "No change in meaning.".into())];
        text.push(Inline::Words(
            " Every formula, range, assumption, correlation, domain, scheme and claim is proved to be what it was.".into(),
        ));
        document.paragraph(text);
    }
    renamings(&mut document, found);
    changes(&mut document, found);
    if !found.is_same() {
        consequences(&mut document, &effects(old, new, found));
    }
    document
}

fn renamings(document: &mut Document, found: &Comparison) {
    if found.renamed.is_empty() {
        return;
    }
    document.section("Renamed");
    let line = |(old, new): &(String, String)| {
        let to = Inline::Words(" is now ".into());
        vec![Inline::Code(old.clone()), to, Inline::Code(new.clone())]
    };
    document.list(found.renamed.iter().map(line).collect());
}

fn changes(document: &mut Document, found: &Comparison) {
    if found.changes.is_empty() {
        return;
    }
    document.section("Changed in meaning");
    let mut table = Table::new([
        ("entry", Align::Left),
        ("was", Align::Left),
        ("is", Align::Left),
        ("difference", Align::Left),
    ]);
    for Change { key, kind } in &found.changes {
        let [was, is, difference] = match kind {
            Kind::Added(new) => [words("not there"), shown(new), Text::new()],
            Kind::Removed(old) => [shown(old), words("gone"), Text::new()],
            Kind::Changed {
                old,
                new,
                difference,
                proved,
            } => {
                let mut text = Text::new();
                if let Some(difference) = difference {
                    text.push(Inline::Written(difference.clone()));
                }
                if !proved {
                    text.push(Inline::Marked(
                        Mark::Open,
                        " (not told apart by proof)".into(),
                    ));
                }
                [shown(old), shown(new), text]
            }
        };
        table.row([code(key), was, is, difference]);
    }
    document.table(table);
}

fn consequences(document: &mut Document, effects: &[Effect]) {
    document.section("What follows from it");
    if effects.is_empty() {
        document.paragraph(words(
            "No drift, correction, method, verdict or known moment of what both versions have is another.",
        ));
    }
    let mut table = Table::new([
        ("of", Align::Left),
        ("what", Align::Left),
        ("was", Align::Left),
        ("is", Align::Left),
    ]);
    let side = |value: &Option<Value>| value.as_ref().map_or_else(|| words("not known"), shown);
    for effect in effects {
        let (of, what) = (code(&effect.of), words(&effect.what));
        table.row([of, what, side(&effect.old), side(&effect.new)]);
    }
    document.table(table);
}

fn shown(value: &Value) -> Text {
    match value {
        Value::Formula(text) => vec![Inline::Written(text.clone())],
        Value::Interval(text) => vec![Inline::Code(text.clone())],
        Value::Word(word) => words(word),
    }
}

/// The comparison for programs.
pub fn json(old: &Compiled, new: &Compiled, found: &Comparison, versions: [&str; 2]) -> Json {
    let text = |value: &Value| json!(value.text());
    let side = |value: &Option<Value>| value.as_ref().map_or(Json::Null, text);
    let change = |Change { key, kind }: &Change| match kind {
        Kind::Added(new) => json!({ "key": key, "kind": "added", "old": null, "new": text(new) }),
        Kind::Removed(old) => {
            json!({ "key": key, "kind": "removed", "old": text(old), "new": null })
        }
        Kind::Changed {
            old,
            new,
            difference,
            proved,
        } => json!({ "key": key, "kind": "changed", "old": text(old), "new": text(new),
                     "difference": difference, "proved": proved }),
    };
    let renamed: Map<String, Json> = found
        .renamed
        .iter()
        .map(|(old, new)| (old.clone(), json!(new)))
        .collect();
    let effects = if found.is_same() {
        Vec::new()
    } else {
        effects(old, new, found)
    };
    let effect = |e: &Effect| json!({ "of": e.of, "what": e.what, "old": side(&e.old), "new": side(&e.new) });
    json!({
        "old": versions[0], "new": versions[1], "same_meaning": found.is_same(),
        "renamed": renamed,
        "changes": found.changes.iter().map(change).collect::<Vec<_>>(),
        "effects": effects.iter().map(effect).collect::<Vec<_>>(),
    })
}
