//! What is checked of a model: moments of every quantity, covariances of the states, quantiles of known
//! laws, and the claims that speak of moments or laws.

use super::expect::{Analyst, LEVELS, Statistic};
use crate::analysis::claims::{ClaimResult, Verdict};
use crate::analysis::moments::LawName;
use crate::model::{ClaimKind, Formula, Model, Named};
use crate::source::Span;
use crate::symbolic::Expr;

/// A statistic, what it is of, and where its analytic value comes from.
#[derive(Clone, Debug)]
pub(super) struct Target {
    /// The quantity's name, or a claim's formula.
    pub(super) quantity: String,
    /// The statistic.
    pub(super) statistic: Statistic,
    /// Where the analytic value comes from.
    pub(super) origin: Origin,
    /// The claim that is put to the test.
    pub(super) claim: Option<String>,
}

/// Where an analytic value comes from.
#[derive(Clone, Debug)]
pub(super) enum Origin {
    /// The compiler's own moments and laws; with the name of the source.
    Derived(String),
    /// A claim's right-hand side, in time and parameters.
    Claimed(Expr),
    /// A claim that the mean stays what it is at time 0.
    Constant,
    /// A claim's difference, which should vanish.
    Zero,
}

/// The targets of a model, and what must be observed for them.
pub(super) struct Targets {
    /// The model with the claims' formulas as further readouts; its paths are those of the model.
    pub(super) model: Model,
    /// The formula of each output.
    pub(super) outputs: Vec<Expr>,
    /// Pairs of outputs whose covariance is needed.
    pub(super) pairs: Vec<(usize, usize)>,
    /// The targets, in the order in which they are shown.
    pub(super) list: Vec<Target>,
}

impl Targets {
    /// What there is to check.
    pub(super) fn new(analyst: &Analyst<'_>, claims: &[ClaimResult]) -> Self {
        let model = analyst.model.clone();
        let pool = &model.pool;
        let states = model
            .states
            .iter()
            .map(|s| (s.name.clone(), pool.var(s.symbol)));
        let named = model.derived.iter().chain(&model.readouts);
        let quantities: Vec<(String, Expr)> = states
            .chain(named.map(|n| (n.name.clone(), n.formula.expr)))
            .collect();
        let outputs = quantities.iter().map(|(_, e)| *e).collect();
        let mut targets = Self {
            model,
            outputs,
            pairs: Vec::new(),
            list: Vec::new(),
        };
        for (output, (name, formula)) in quantities.iter().enumerate() {
            targets.quantity(analyst, output, name, *formula);
        }
        targets.state_covariances(analyst);
        for (i, result) in claims.iter().enumerate() {
            if result.verdict != Verdict::Refuted {
                targets.claim(analyst, i, result);
            }
        }
        targets
    }

    fn push(&mut self, quantity: &str, statistic: Statistic, origin: Origin, claim: Option<&str>) {
        let claim = claim.map(str::to_owned);
        self.list.push(Target {
            quantity: quantity.to_owned(),
            statistic,
            origin,
            claim,
        });
    }

    fn quantity(&mut self, analyst: &Analyst<'_>, output: usize, name: &str, formula: Expr) {
        let closed = analyst.moments.mean(formula).map(|m| m.source);
        let source = closed.unwrap_or_else(|| analyst.moments.numeric_source(formula));
        for statistic in [
            Statistic::Mean(output),
            Statistic::Variance(output),
            Statistic::Skewness(output),
        ] {
            self.push(name, statistic, Origin::Derived(source.clone()), None);
        }
        if output < self.model.states.len() {
            self.law(analyst, output, name, formula, None);
        }
    }

    fn law(
        &mut self,
        analyst: &Analyst<'_>,
        output: usize,
        name: &str,
        formula: Expr,
        claim: Option<&str>,
    ) {
        if let Some(law) = analyst.moments.marginal_law(formula) {
            let kind = law.name().map_or("square_root", LawName::name);
            let source = format!("{} law", kind.replace('_', " "));
            for level in 0..LEVELS.len() {
                let statistic = Statistic::Quantile(output, level, Box::new(law.clone()));
                self.push(name, statistic, Origin::Derived(source.clone()), claim);
            }
        }
    }

    fn state_covariances(&mut self, analyst: &Analyst<'_>) {
        let states = self.model.states.len();
        for i in 0..states {
            for j in i + 1..states {
                let name = format!(
                    "{}, {}",
                    self.model.states[i].name, self.model.states[j].name
                );
                let found = analyst.moments.covariance(self.outputs[i], self.outputs[j]);
                let product = self.model.pool.mul(self.outputs[i], self.outputs[j]);
                let source = found.map(|m| m.source);
                let source = source.unwrap_or_else(|| analyst.moments.numeric_source(product));
                let pair = self.pair(i, j);
                self.push(
                    &name,
                    Statistic::Covariance(pair),
                    Origin::Derived(source),
                    None,
                );
            }
        }
    }

    fn pair(&mut self, i: usize, j: usize) -> usize {
        let wanted = (i, j);
        self.pairs
            .iter()
            .position(|p| *p == wanted)
            .unwrap_or_else(|| {
                self.pairs.push(wanted);
                self.pairs.len() - 1
            })
    }

    /// The output of a formula; one that is not yet observed becomes a readout.
    fn output(&mut self, text: &str, formula: Expr) -> usize {
        if let Some(known) = self.outputs.iter().position(|o| *o == formula) {
            return known;
        }
        self.model.readouts.push(Named {
            name: text.to_owned(),
            formula: Formula {
                expr: formula,
                text: text.to_owned(),
                span: Span::default(),
            },
            about: None,
            unit: None,
            span: Span::default(),
        });
        self.outputs.push(formula);
        self.outputs.len() - 1
    }

    /// A claim as a target. One that was proved about a quantity above says the same as the
    /// compiler's own value, and is not counted twice.
    fn claim(&mut self, analyst: &Analyst<'_>, index: usize, result: &ClaimResult) {
        let claim = analyst.model.claims[index].clone();
        let open = result.verdict == Verdict::Open;
        let known = |targets: &Self, f: &Formula| targets.outputs.contains(&f.expr) && !open;
        let name = Some(claim.name.as_str());
        match &claim.kind {
            ClaimKind::MeanOf { of, is } if !known(self, of) => {
                let output = self.output(&of.text, of.expr);
                self.push(
                    &of.text,
                    Statistic::Mean(output),
                    Origin::Claimed(is.expr),
                    name,
                );
            }
            ClaimKind::VarianceOf { of, is } if !known(self, of) => {
                let output = self.output(&of.text, of.expr);
                self.push(
                    &of.text,
                    Statistic::Variance(output),
                    Origin::Claimed(is.expr),
                    name,
                );
            }
            ClaimKind::CovarianceOf { of: [x, y], is } => {
                let (i, j) = (self.output(&x.text, x.expr), self.output(&y.text, y.expr));
                let pairs = self.pairs.len();
                let pair = self.pair(i.min(j), i.max(j));
                if open || pair == pairs {
                    let both = format!("{}, {}", x.text, y.text);
                    self.push(
                        &both,
                        Statistic::Covariance(pair),
                        Origin::Claimed(is.expr),
                        name,
                    );
                }
            }
            ClaimKind::Martingale { of } => {
                let output = self.output(&of.text, of.expr);
                self.push(&of.text, Statistic::Mean(output), Origin::Constant, name);
            }
            ClaimKind::LawOf { of, .. } if !known(self, of) => {
                let output = self.output(&of.text, of.expr);
                self.law(analyst, output, &of.text, of.expr, name);
            }
            ClaimKind::DriftOf { of, .. } | ClaimKind::DiffusionOf { of, .. } if open => {
                if let (Some(difference), Some(claimed)) = (result.difference, result.claimed) {
                    let text = format!("{} derived - claimed", of.text);
                    let output = self.output(&text, difference);
                    let beside = self.output(&format!("{} claimed", of.text), claimed);
                    self.push(
                        &of.text,
                        Statistic::Vanishing(output, beside),
                        Origin::Zero,
                        name,
                    );
                }
            }
            _ => {}
        }
    }
}
