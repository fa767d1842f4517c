//! `through`: the coordinate a state is simulated in.

use super::super::raw::{RawFormula, RawState};
use super::Resolver;
use super::numbers::short;
use super::place::Place;
use crate::diagnostic::{Code, Diagnostic};
use crate::model::Formula;
use crate::symbolic::{Bound, Interval, Symbol};

/// Distances from zero or from an end at which a coordinate is tried: small enough that no common
/// function overflows.
const DISTANCES: [f64; 7] = [0.01, 0.1, 0.25, 0.5, 1.0, 2.0, 3.0];

impl Resolver<'_> {
    /// The coordinate, if it can be one: it uses its state, has a value on the domain and does not
    /// turn round. The last two are tried at points, at the default values; the proof is the
    /// planner's.
    pub(super) fn through(
        &mut self,
        state: &RawState,
        raw: &RawFormula,
        symbol: Symbol,
        domain: &Interval,
    ) -> Option<Formula> {
        let formula = self
            .scope
            .formula(raw, Place::Through(symbol), self.diagnostics)?;
        let name = &state.name.text;
        let problem = if self.pool.depends_on(formula.expr, symbol) {
            self.fault(name, &formula, symbol, domain)?
        } else {
            let hint = format!("use `{name}` in it, or leave it out");
            Some((format!("the coordinate does not depend on `{name}`"), hint))
        };
        if let Some((message, hint)) = problem {
            let mut diagnostic =
                Diagnostic::error(Code::BadCoordinate, raw.span, message).hint(hint);
            if let Some(ast) = &state.domain {
                diagnostic = diagnostic.label(ast.span, "the domain");
            }
            self.diagnostics.push(diagnostic);
            return None;
        }
        Some(formula)
    }

    /// What is wrong with a coordinate and what to do; `Some(None)` where nothing was found.
    fn fault(
        &self,
        name: &str,
        formula: &Formula,
        symbol: Symbol,
        domain: &Interval,
    ) -> Option<Option<(String, String)>> {
        let mut values = self.numbers.defaults().clone();
        values.insert(self.scope.time, 1.0);
        let known = self.pool.symbols_of(formula.expr).into_iter();
        if known
            .filter(|s| *s != symbol)
            .any(|s| !values.contains_key(&s))
        {
            return Some(None);
        }
        let slope = self.pool.derivative(formula.expr, symbol);
        let (mut rises, mut falls) = (None, None);
        for point in self.points(domain) {
            values.insert(symbol, point);
            if self.pool.eval_f64(formula.expr, &values).is_none() {
                let message = format!("the coordinate has no value at {name} = {}", short(point));
                let hint = "narrow the domain, to \"(0, inf)\" for a logarithm".to_owned();
                return Some(Some((message, hint)));
            }
            match self.pool.eval_f64(slope, &values) {
                Some(slope) if slope > 0.0 => rises = rises.or(Some(point)),
                Some(slope) if slope < 0.0 => falls = falls.or(Some(point)),
                _ => {}
            }
        }
        let (Some(up), Some(down)) = (rises, falls) else {
            return Some(None);
        };
        let message = format!(
            "the coordinate rises at {name} = {} and falls at {name} = {}",
            short(up),
            short(down)
        );
        let hint = "a coordinate is strictly monotone, so that it can be mapped back".to_owned();
        Some(Some((message, hint)))
    }

    /// Points in the domain, closed ends among them.
    fn points(&self, domain: &Interval) -> Vec<f64> {
        let end = |bound: Bound| bound.value().and_then(|e| Some(self.numbers.value(e)?.0));
        let distances = DISTANCES.into_iter();
        let mut points: Vec<f64> = match (end(domain.lower), end(domain.upper)) {
            (Some(a), Some(b)) => (1..20).map(|i| a + (b - a) * f64::from(i) / 20.0).collect(),
            (Some(a), None) => distances.map(|d| a + d).collect(),
            (None, Some(b)) => distances.map(|d| b - d).collect(),
            (None, None) => distances.rev().flat_map(|d| [d, -d]).collect(),
        };
        let closed = [domain.lower, domain.upper].into_iter();
        points.extend(
            closed
                .filter(|b| matches!(b, Bound::Closed(_)))
                .filter_map(end),
        );
        points
    }
}
