//! Each formula against what its place asks for.

use super::Checker;
use super::dimension::Dimension;
use super::infer::Measure;
use crate::diagnostic::{Code, Diagnostic};
use crate::front::formula::{Ast, IntervalAst, IntervalEnd};
use crate::front::raw::{PerDriver, RawClaim, RawClaimKind, RawFormula, RawModel, RawState};
use crate::symbolic::Rational;

impl<'a> Checker<'a> {
    /// Every formula of the file.
    pub(super) fn formulas(&mut self, raw: &'a RawModel) {
        self.definitions(raw);
        for state in &raw.states {
            self.state(state);
        }
        for parameter in &raw.parameters {
            self.interval(parameter.range.as_ref(), &parameter.name.text, "range");
        }
        for assumption in &raw.assumptions {
            let left = self.infer(&assumption.left);
            let right = self.infer(&assumption.right);
            let what = "the right side of the assumption";
            self.compare((&assumption.left, &left), (&assumption.right, &right), what);
        }
        for correlation in &raw.correlations {
            let ast = &correlation.formula.ast;
            let measure = self.infer(ast);
            self.expect(ast, &measure, &Dimension::one(), "", "a correlation");
        }
        for claim in &raw.claims {
            self.claim(claim);
        }
    }

    fn state(&mut self, state: &RawState) {
        let name = state.name.text.as_str();
        let Some(own) = self.known.get(name).map(|known| known.measure.dimension()) else {
            return;
        };
        let rate = own.over(&self.time);
        let noise = own.over(&self.time.power(&half()));
        if let Some(initial) = &state.initial {
            self.formula(
                initial,
                &own,
                name,
                &format!("the initial value of `{name}`"),
            );
        }
        if let Some(drift) = &state.drift {
            self.formula(drift, &rate, name, &format!("the drift of `{name}`"));
        }
        for diffusion in state.diffusion.iter().flat_map(per_driver) {
            self.formula(
                diffusion,
                &noise,
                name,
                &format!("the diffusion of `{name}`"),
            );
        }
        self.interval(state.domain.as_ref(), name, "domain");
        if let Some(through) = &state.through {
            self.infer(&through.ast);
        }
    }

    fn formula(&mut self, formula: &RawFormula, wanted: &Dimension, owner: &str, what: &str) {
        let measure = self.infer(&formula.ast);
        self.expect(&formula.ast, &measure, wanted, owner, what);
    }

    fn interval(&mut self, interval: Option<&IntervalAst>, name: &str, what: &str) {
        let (Some(interval), Some(known)) = (interval, self.known.get(name)) else {
            return;
        };
        let own = known.measure.dimension();
        for end in [&interval.lower, &interval.upper] {
            if let IntervalEnd::Open(ast) | IntervalEnd::Closed(ast) = end {
                let measure = self.infer(ast);
                let what = format!("an end of the {what} of `{name}`");
                self.expect(ast, &measure, &own, name, &what);
            }
        }
    }

    /// A formula whose dimension its place gives; `owner` is the quantity it belongs to.
    pub(super) fn expect(
        &mut self,
        ast: &Ast,
        measure: &Measure,
        wanted: &Dimension,
        owner: &str,
        what: &str,
    ) {
        let Measure::Quantity(dimension) = measure else {
            return;
        };
        if self.unknowns.equate(dimension, wanted, ast.span) {
            return;
        }
        let owned = self.known.get(owner).filter(|known| known.concerned);
        if owned.is_none() && !self.concerns(&[ast]) {
            return;
        }
        let (found, needed) = (self.unknowns.show(dimension), self.unknowns.show(wanted));
        let message = format!("{what} is {found}, it must be {needed}");
        let mut diagnostic = Diagnostic::error(Code::UnitMismatch, ast.span, message)
            .label(ast.span, format!("this is {found}"));
        if let Some(known) = owned {
            let unit = self.unknowns.show(&known.measure.dimension());
            diagnostic = diagnostic.label(known.place, format!("`{owner}` is {unit}"));
        }
        let hint = "look for a missing factor, or mend the units declared; a number that has a unit \
                    is best named as a parameter";
        self.report(diagnostic.hint(hint), &[ast]);
    }

    /// Two formulas that must have one dimension; numbers may stand for any.
    fn compare(&mut self, left: (&Ast, &Measure), right: (&Ast, &Measure), what: &str) {
        let (Measure::Quantity(wanted), Measure::Quantity(found)) = (left.1, right.1) else {
            return;
        };
        let (wanted, found) = (wanted.clone(), found.clone());
        if self.unknowns.equate(&found, &wanted, right.0.span) || !self.concerns(&[left.0, right.0])
        {
            return;
        }
        let (found, needed) = (self.unknowns.show(&found), self.unknowns.show(&wanted));
        let message = format!("{what} is {found}, it must be {needed}");
        let diagnostic = Diagnostic::error(Code::UnitMismatch, right.0.span, message)
            .label(right.0.span, format!("this is {found}"))
            .label(left.0.span, format!("this asks for {needed}"))
            .hint("look for a missing factor, or mend the units declared");
        self.report(diagnostic, &[right.0, left.0]);
    }

    fn claim(&mut self, claim: &RawClaim) {
        match &claim.kind {
            RawClaimKind::Martingale { of } | RawClaimKind::Law { of, .. } => {
                self.infer(&of.ast);
            }
            RawClaimKind::Drift { of, is } => {
                let per_time = self.time.power(&-Rational::ONE);
                self.claimed(of, &per_time, is, "the claimed drift");
            }
            RawClaimKind::Diffusion { of, is } => {
                let per_root = self.time.power(&-half());
                let measure = self.claimed_measure(of, &per_root);
                for is in per_driver(is) {
                    self.claimed_value(of, &measure, is, "the claimed diffusion");
                }
            }
            RawClaimKind::Mean { of, is } => {
                self.claimed(of, &Dimension::one(), is, "the claimed mean");
            }
            RawClaimKind::Variance { of, is } => {
                let measure = match self.infer(&of.ast) {
                    Measure::Number => Measure::Number,
                    Measure::Quantity(d) => Measure::Quantity(d.power(&Rational::from(2))),
                };
                self.claimed_value(of, &measure, is, "the claimed variance");
            }
            RawClaimKind::Covariance { of, is } => {
                let [first, second] = of;
                let measures = (self.infer(&first.ast), self.infer(&second.ast));
                if let (Measure::Quantity(mut product), Measure::Quantity(other)) = measures {
                    product.multiply(&other, &Rational::ONE);
                    let measure = Measure::Quantity(product);
                    self.claimed_value(first, &measure, is, "the claimed covariance");
                } else {
                    self.infer(&is.ast);
                }
            }
        }
    }

    fn claimed(&mut self, of: &RawFormula, by: &Dimension, is: &RawFormula, what: &str) {
        let measure = self.claimed_measure(of, by);
        self.claimed_value(of, &measure, is, what);
    }

    /// The measure of what a claim is about, times `by`.
    fn claimed_measure(&mut self, of: &RawFormula, by: &Dimension) -> Measure {
        match self.infer(&of.ast) {
            Measure::Number => Measure::Number,
            Measure::Quantity(mut dimension) => {
                dimension.multiply(by, &Rational::ONE);
                Measure::Quantity(dimension)
            }
        }
    }

    fn claimed_value(&mut self, of: &RawFormula, wanted: &Measure, is: &RawFormula, what: &str) {
        let found = self.infer(&is.ast);
        self.compare((&of.ast, wanted), (&is.ast, &found), what);
    }
}

fn per_driver(formulas: &PerDriver) -> Box<dyn Iterator<Item = &RawFormula> + '_> {
    match formulas {
        PerDriver::Single(formula) => Box::new(std::iter::once(formula)),
        PerDriver::Table(formulas) => Box::new(formulas.iter().map(|(_, formula)| formula)),
    }
}

fn half() -> Rational {
    Rational::from_parts(1.into(), 2u8.into())
}
