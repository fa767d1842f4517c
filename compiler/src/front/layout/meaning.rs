//! What a model says, as a list of facts that two models can be compared by.

use std::collections::BTreeMap;

use crate::model::{Claim, ClaimKind, Formula, Model, Named, Parameter, State};
use crate::symbolic::{Bound, Expr, Interval, Node, Pool};

/// Something a model says.
#[derive(Clone, Debug, PartialEq)]
enum Fact {
    Text(String),
    Formula(Expr),
}

/// The first thing that two models say differently; none where they mean the same.
///
/// Formulas are brought into one pool, where equal normal structure is one handle: what has the same
/// handle has the same normal form.
pub(super) fn difference(before: &Model, after: &Model) -> Option<String> {
    let (before, after) = (
        Portrait::of(before, &before.pool),
        Portrait::of(after, &before.pool),
    );
    let (left, right) = (before.facts.iter(), after.facts.iter());
    let different = left.zip(right).find(|(one, other)| one != other);
    match different {
        Some(((what, _), _)) => Some(what.clone()),
        None if before.facts.len() != after.facts.len() => Some("how much it declares".to_owned()),
        None => None,
    }
}

/// All that a model says, in order, formulas in the pool `to`.
struct Portrait<'a> {
    from: &'a Pool,
    to: &'a Pool,
    known: BTreeMap<Expr, Expr>,
    facts: Vec<(String, Fact)>,
}

impl<'a> Portrait<'a> {
    fn of(model: &'a Model, to: &'a Pool) -> Self {
        let mut portrait = Self {
            from: &model.pool,
            to,
            known: BTreeMap::new(),
            facts: Vec::new(),
        };
        portrait.head(model);
        model.parameters.iter().for_each(|p| portrait.parameter(p));
        for assumption in &model.assumptions {
            let what = format!("assumption `{}`", assumption.name);
            portrait.formula(&what, assumption.left);
            portrait.text(&what, format!("{:?}", assumption.relation));
            portrait.formula(&what, assumption.right);
        }
        for (row, line) in model.correlation.iter().enumerate() {
            for entry in line {
                portrait.formula(&format!("row {} of the correlation", row + 1), *entry);
            }
        }
        model.states.iter().for_each(|s| portrait.state(s));
        let named = [&model.wheres, &model.derived, &model.readouts];
        named.into_iter().flatten().for_each(|n| portrait.named(n));
        model.claims.iter().for_each(|c| portrait.claim(c));
        portrait
    }

    fn head(&mut self, model: &Model) {
        let drivers: Vec<&str> = model.drivers.iter().map(|d| d.name.as_str()).collect();
        self.text("the model's name", &model.name);
        self.text("the model's drivers", drivers.join(", "));
        self.text("the calculus", format!("{:?}", model.calculus));
        self.words("title", &model.title);
        self.words("about", &model.about);
        self.words("time_unit", &model.time_unit);
    }

    fn parameter(&mut self, parameter: &Parameter) {
        let what = format!("parameter `{}`", parameter.name);
        self.text(&what, format!("{:?}", parameter.value));
        self.words(&what, &parameter.unit);
        self.words(&what, &parameter.about);
        self.interval(&what, &parameter.range);
    }

    fn state(&mut self, state: &State) {
        let what = format!("state `{}`", state.name);
        self.words(&what, &state.about);
        self.words(&what, &state.unit);
        self.formula(&what, state.initial.expr);
        self.formula(&what, state.drift.expr);
        for coefficient in &state.diffusion {
            self.formula(&what, *coefficient);
        }
        self.interval(&what, &state.domain);
        self.text(&what, format!("{:?}", (state.at_lower, state.at_upper)));
        self.text(&what, format!("{:?}", state.scheme.map(|(name, _)| name)));
        self.text(&what, format!("{}", state.through.is_some()));
        let through = state.through.iter();
        through.for_each(|formula| self.formula(&what, formula.expr));
    }

    fn named(&mut self, named: &Named) {
        let what = format!("`{}`", named.name);
        self.text(&what, &named.name);
        self.words(&what, &named.about);
        self.words(&what, &named.unit);
        self.formula(&what, named.formula.expr);
    }

    fn claim(&mut self, claim: &Claim) {
        let what = format!("claim `{}`", claim.name);
        let (kind, formulas): (&str, Vec<&Formula>) = match &claim.kind {
            ClaimKind::DriftOf { of, is } => ("drift_of", vec![of, is]),
            ClaimKind::DiffusionOf { of, is } => {
                let drivers: Vec<usize> = is.iter().map(|(driver, _)| *driver).collect();
                self.text(&what, format!("{drivers:?}"));
                let is = is.iter().map(|(_, formula)| formula);
                ("diffusion_of", [of].into_iter().chain(is).collect())
            }
            ClaimKind::Martingale { of } => ("martingale", vec![of]),
            ClaimKind::MeanOf { of, is } => ("mean_of", vec![of, is]),
            ClaimKind::VarianceOf { of, is } => ("variance_of", vec![of, is]),
            ClaimKind::CovarianceOf { of: [x, y], is } => ("covariance_of", vec![x, y, is]),
            ClaimKind::LawOf { of, is } => {
                self.text(&what, &is.0);
                ("law_of", vec![of])
            }
        };
        self.text(&what, kind);
        for formula in formulas {
            self.formula(&what, formula.expr);
        }
    }

    fn interval(&mut self, what: &str, interval: &Interval) {
        for bound in [interval.lower, interval.upper] {
            let kind = match bound {
                Bound::Infinite => "infinite",
                Bound::Open(_) => "open",
                Bound::Closed(_) => "closed",
            };
            self.text(what, kind);
            bound
                .value()
                .into_iter()
                .for_each(|e| self.formula(what, e));
        }
    }

    /// A text of the author's; its line ends are the platform's choice.
    fn words(&mut self, what: &str, text: &Option<String>) {
        self.text(what, format!("{text:?}").replace("\\r\\n", "\\n"));
    }

    fn text(&mut self, what: &str, text: impl Into<String>) {
        self.facts.push((what.to_owned(), Fact::Text(text.into())));
    }

    fn formula(&mut self, what: &str, formula: Expr) {
        let formula = self.bring(formula);
        self.facts.push((what.to_owned(), Fact::Formula(formula)));
    }

    /// The formula in the other pool, built again from its leaves.
    fn bring(&mut self, formula: Expr) -> Expr {
        for part in self.from.postorder(formula) {
            if !self.known.contains_key(&part) {
                let brought = self.rebuild(&self.from.node(part));
                self.known.insert(part, brought);
            }
        }
        self.known[&formula]
    }

    fn rebuild(&self, node: &Node) -> Expr {
        let at = |e: &Expr| self.known[e];
        match node {
            Node::Number(value) => self.to.number(value.clone()),
            Node::Pi => self.to.pi(),
            Node::Symbol(symbol) => {
                let (name, kind) = (
                    self.from.symbol_name(*symbol),
                    self.from.symbol_kind(*symbol),
                );
                self.to.var(self.to.symbol(&name, kind))
            }
            Node::Sum(terms) => self.to.sum(terms.iter().map(at)),
            Node::Product(factors) => self.to.product(factors.iter().map(at)),
            Node::Power(base, exponent) => self.to.pow(at(base), at(exponent)),
            Node::Call(function, arguments) => {
                let arguments: Vec<Expr> = arguments.iter().map(at).collect();
                self.to.call(*function, &arguments)
            }
        }
    }
}
