//! States: domains, coefficients, behaviour at edges.

use super::super::raw::{Name, PerDriver, RawEdge, RawModel, RawState};
use super::intervals::show;
use super::numbers::Basis;
use super::place::Place;
use super::{Resolver, Silent};
use crate::diagnostic::{Code, Diagnostic};
use crate::model::{AtEdge, Formula, State};
use crate::source::Span;
use crate::symbolic::{Bound, Interval, SymbolKind};

impl Resolver<'_> {
    /// The domains, which the pool learns too before any other formula of a state is read.
    pub(super) fn domains(&mut self, raw: &[RawState]) -> Vec<Interval> {
        let mut domains = Vec::new();
        for state in raw {
            let ast = state.domain.as_ref();
            let domain = ast.map_or(Interval::REAL, |ast| self.interval(ast, Place::Domain));
            let symbol = self.pool.symbol(&state.name.text, SymbolKind::State);
            self.pool.set_range(symbol, domain);
            domains.push(domain);
        }
        domains
    }

    /// `[states]`
    pub(super) fn states(&mut self, raw: &RawModel, domains: Vec<Interval>) -> Vec<State> {
        let states = raw.states.iter().zip(domains);
        states
            .map(|(state, domain)| self.state(&raw.drivers, state, domain))
            .collect()
    }

    fn state(&mut self, drivers: &[Name], raw: &RawState, domain: Interval) -> State {
        let symbol = self.pool.symbol(&raw.name.text, SymbolKind::State);
        let initial = raw.initial.as_ref();
        let initial = initial.and_then(|f| self.scope.formula(f, Place::Initial, self.diagnostics));
        if let Some(initial) = &initial {
            self.check_initial(raw, initial, &domain);
        }
        let drift = raw.drift.as_ref();
        let drift = drift.and_then(|f| self.scope.formula(f, Place::Coefficient, self.diagnostics));
        let declared_diffusion = raw
            .diffusion
            .as_ref()
            .map(|d| self.per_driver(drivers, d, Place::Coefficient, raw.name.span))
            .unwrap_or_default();
        let mut diffusion = vec![self.pool.zero(); drivers.len()];
        for (driver, formula) in &declared_diffusion {
            diffusion[*driver] = formula.expr;
        }
        let (at_lower, at_upper) = self.edges(raw, &domain);
        State {
            name: raw.name.text.clone(),
            symbol,
            about: raw.about.clone(),
            unit: raw.unit.as_ref().map(|unit| unit.text.clone()),
            initial: initial.unwrap_or_else(|| self.stand_in()),
            drift: drift.unwrap_or_else(|| self.stand_in()),
            diffusion,
            declared_diffusion,
            domain,
            domain_span: raw.domain.as_ref().map(|ast| ast.span),
            at_lower,
            at_upper,
            through: raw
                .through
                .as_ref()
                .and_then(|f| self.through(raw, f, symbol, &domain)),
            scheme: raw.scheme,
            span: raw.name.span,
        }
    }

    /// Formulas by driver; `owner` is what is pointed at where drivers are missing.
    pub(super) fn per_driver(
        &mut self,
        drivers: &[Name],
        raw: &PerDriver,
        place: Place,
        owner: Span,
    ) -> Vec<(usize, Formula)> {
        let formulas = match raw {
            PerDriver::Single(formula) => {
                let resolved = self.scope.formula(formula, place, self.diagnostics);
                let [driver] = drivers else {
                    if !matches!(self.silent_drivers, Silent::All) {
                        self.unclear_driver(drivers, formula.span, owner);
                    }
                    return Vec::new();
                };
                self.scope.mark_used(&driver.text);
                return resolved.map(|formula| (0, formula)).into_iter().collect();
            }
            PerDriver::Table(formulas) => formulas,
        };
        let mut found = Vec::new();
        for (name, formula) in formulas {
            let resolved = self.scope.formula(formula, place, self.diagnostics);
            if let Some(driver) = self.driver(drivers, name) {
                self.scope.mark_used(&name.text);
                found.extend(resolved.map(|formula| (driver, formula)));
            }
        }
        found
    }

    fn unclear_driver(&mut self, drivers: &[Name], span: Span, owner: Span) {
        let (message, hint) = match drivers {
            [] => (
                "there is no driver to multiply this with".to_owned(),
                "add drivers = [\"W\"] to `[model]`, or leave the diffusion out".to_owned(),
            ),
            [first, ..] => (
                format!("this could belong to any of the {} drivers", drivers.len()),
                format!("write a table, {{ {} = \"...\" }}", first.text),
            ),
        };
        let diagnostic = Diagnostic::error(Code::BadDiffusion, span, message);
        self.diagnostics
            .push(diagnostic.label(owner, "in this").hint(hint));
    }

    fn check_initial(&mut self, raw: &RawState, initial: &Formula, domain: &Interval) {
        let Some(basis) = self.numbers.outside(initial.expr, domain) else {
            return;
        };
        let name = &raw.name.text;
        let shown = show(self, domain);
        let mut diagnostic = match basis {
            Basis::Literal => {
                let message = format!("`{name}` starts outside its domain {shown}");
                Diagnostic::error(Code::InitialOutsideDomain, initial.span, message)
                    .hint("change the initial value or the domain")
            }
            Basis::Defaults => {
                let message =
                    format!("at the default values `{name}` starts outside its domain {shown}");
                Diagnostic::warning(Code::InitialOutsideDomain, initial.span, message)
                    .hint("change the default values, or the domain")
            }
        };
        if let Some(ast) = &raw.domain {
            diagnostic = diagnostic.label(ast.span, "the domain");
        }
        self.diagnostics.push(diagnostic);
    }

    /// What happens at the closed ends.
    fn edges(&mut self, raw: &RawState, domain: &Interval) -> (Option<AtEdge>, Option<AtEdge>) {
        let closed = |bound: &Bound| matches!(bound, Bound::Closed(_));
        let (low, high) = (closed(&domain.lower), closed(&domain.upper));
        match &raw.at_edge {
            None => (None, None),
            Some(RawEdge::Both(edge, span)) => {
                if !low && !high {
                    self.no_edge(*span, "neither end of the domain is closed", raw);
                }
                (low.then_some(*edge), high.then_some(*edge))
            }
            Some(RawEdge::Ends { lower, upper }) => {
                if let (Some((_, span)), false) = (lower, low) {
                    self.no_edge(*span, "the lower end of the domain is not closed", raw);
                }
                if let (Some((_, span)), false) = (upper, high) {
                    self.no_edge(*span, "the upper end of the domain is not closed", raw);
                }
                (lower.map(|(edge, _)| edge), upper.map(|(edge, _)| edge))
            }
        }
    }

    fn no_edge(&mut self, span: Span, message: &str, raw: &RawState) {
        let diagnostic = Diagnostic::error(Code::BadEdge, span, message);
        let diagnostic = match &raw.domain {
            Some(ast) => diagnostic.label(ast.span, "the domain"),
            None => diagnostic.note("the domain is the whole line where none is written"),
        };
        self.diagnostics.push(
            diagnostic.hint("close the end with a bracket, as in \"[0, inf)\", or remove this"),
        );
    }
}
