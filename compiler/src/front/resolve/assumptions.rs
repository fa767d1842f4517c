//! Assumptions: what they compare, and how they stand to the ranges and to one another.

use super::super::raw::RawAssumption;
use super::Resolver;
use super::numbers::{Basis, short};
use super::place::Place;
use crate::diagnostic::{Code, Diagnostic};
use crate::model::{Assumption, Relation};
use crate::symbolic::Inequality;

/// Assumptions up to which they are compared with one another.
const MAX_COMPARED: usize = 40;

impl Resolver<'_> {
    /// `[assumptions]`
    pub(super) fn assumptions(&mut self, raw: &[RawAssumption]) -> Vec<Assumption> {
        let list: Vec<Assumption> = raw
            .iter()
            .filter_map(|assumption| self.assumption(assumption))
            .collect();
        let margins: Vec<Inequality> = list.iter().map(|a| self.margin(a)).collect();
        let possible = self.without_contradictions(&list, &margins);
        self.redundant(&list, &margins, possible);
        list
    }

    fn assumption(&mut self, raw: &RawAssumption) -> Option<Assumption> {
        let lower = |ast| self.scope.lower(ast, Place::Assumption, self.diagnostics);
        let [left, right] = [&raw.left, &raw.right].map(lower);
        Some(Assumption {
            name: raw.name.text.clone(),
            left: left?,
            relation: raw.relation,
            right: right?,
            text: raw.text.clone(),
            span: raw.span,
        })
    }

    /// The difference that an assumption asks to be positive, or not negative.
    fn margin(&self, assumption: &Assumption) -> Inequality {
        let (large, small, strict) = match assumption.relation {
            Relation::Greater => (assumption.left, assumption.right, true),
            Relation::GreaterEqual => (assumption.left, assumption.right, false),
            Relation::Less => (assumption.right, assumption.left, true),
            Relation::LessEqual => (assumption.right, assumption.left, false),
        };
        let margin = self.pool.sub(large, small);
        Inequality { margin, strict }
    }

    /// Reports assumptions that no parameters satisfy, alone or beside those before them, and those
    /// that the default values do not; the positions of the others.
    fn without_contradictions(
        &mut self,
        list: &[Assumption],
        margins: &[Inequality],
    ) -> Vec<usize> {
        let mut possible: Vec<usize> = Vec::new();
        let mut at_odds: Vec<usize> = Vec::new();
        for (i, assumption) in list.iter().enumerate() {
            if self.is_literal(margins[i], assumption) {
                continue;
            }
            possible.push(i);
            let facts: Vec<Inequality> = possible.iter().map(|&j| margins[j]).collect();
            if facts.len() > MAX_COMPARED {
                continue;
            }
            if let Some(used) = self.pool.contradiction(&facts) {
                possible.pop();
                at_odds.push(i);
                let others = used.into_iter().filter_map(|k| possible.get(k).copied());
                let others: Vec<usize> = others.collect();
                let parties: Vec<&Assumption> = others.iter().map(|&j| &list[j]).collect();
                self.diagnostics.push(contradicted(assumption, &parties));
                at_odds.extend(others);
            }
        }
        for &i in possible.iter().filter(|i| !at_odds.contains(i)) {
            self.at_defaults(&list[i], margins[i]);
        }
        possible
    }

    /// Whether an assumption compares numbers, which is an error.
    fn is_literal(&mut self, margin: Inequality, assumption: &Assumption) -> bool {
        let value = self.numbers.value(margin.margin);
        let literal = matches!(value, Some((_, Basis::Literal)));
        if literal {
            let message = "the assumption does not depend on any parameter";
            self.diagnostics.push(
                Diagnostic::error(Code::BadAssumption, assumption.span, message)
                    .hint("compare formulas in the parameters, or remove it"),
            );
        }
        literal
    }

    /// Warns of an assumption that the default values do not satisfy.
    fn at_defaults(&mut self, assumption: &Assumption, margin: Inequality) {
        let Some((value, _)) = self.numbers.value(margin.margin) else {
            return;
        };
        if value > 0.0 || (value == 0.0 && !margin.strict) {
            return;
        }
        let at = |e| self.numbers.value(e).map(|(value, _)| short(value));
        let message = format!(
            "the assumption `{}` fails at the default values: {} against {}",
            assumption.name,
            at(assumption.left).unwrap_or_default(),
            at(assumption.right).unwrap_or_default()
        );
        self.diagnostics.push(
            Diagnostic::warning(Code::AssumptionFails, assumption.span, message)
                .hint("change the default values, or the assumption"),
        );
    }

    /// Warns of assumptions that follow from the ranges or from the others: of two that say the same
    /// the later one.
    fn redundant(&mut self, list: &[Assumption], margins: &[Inequality], mut kept: Vec<usize>) {
        if kept.len() > MAX_COMPARED {
            return;
        }
        for i in kept.clone().into_iter().rev() {
            let others: Vec<usize> = kept.iter().copied().filter(|j| *j != i).collect();
            let facts: Vec<Inequality> = others.iter().map(|&j| margins[j]).collect();
            if let Some(used) = self.pool.follows(&facts, margins[i]) {
                let parties: Vec<&Assumption> =
                    used.into_iter().map(|k| &list[others[k]]).collect();
                self.diagnostics.push(implied(&list[i], &parties));
                kept = others;
            }
        }
    }
}

/// The ranges, or the assumptions by name.
fn named(others: &[&Assumption]) -> String {
    let names: Vec<String> = others.iter().map(|a| format!("`{}`", a.name)).collect();
    match names.split_last() {
        None => "the ranges of the parameters".to_owned(),
        Some((last, [])) => format!("the assumption {last}"),
        Some((last, rest)) => format!("the assumptions {} and {last}", rest.join(", ")),
    }
}

fn implied(assumption: &Assumption, others: &[&Assumption]) -> Diagnostic {
    let message = format!("`{}` follows from {}", assumption.name, named(others));
    let finding = Diagnostic::warning(Code::AssumptionImplied, assumption.span, message)
        .note("it rules nothing out: the model means the same without it")
        .hint("remove it; or look for a slip in it, such as a sign or a factor");
    labelled(finding, others)
}

fn contradicted(assumption: &Assumption, others: &[&Assumption]) -> Diagnostic {
    let message = format!("`{}` contradicts {}", assumption.name, named(others));
    let finding = Diagnostic::error(Code::AssumptionContradicted, assumption.span, message)
        .note("no values of the parameters satisfy all of this: no simulator could ever start")
        .hint("look for a sign or relation the wrong way round");
    labelled(finding, others)
}

fn labelled(finding: Diagnostic, others: &[&Assumption]) -> Diagnostic {
    let label =
        |finding: Diagnostic, other: &&Assumption| finding.label(other.span, "assumed here");
    others.iter().fold(finding, label)
}
