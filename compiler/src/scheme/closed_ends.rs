//! What the author should know of closed ends: starts that never leave one, and equations that lead
//! across one.

use crate::analysis::asymptotics::Side;
use crate::analysis::boundary::{End, classify};
use crate::calculus::Dynamics;
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::model::{AtEdge, Formula, Model};
use crate::source::Span;
use crate::symbolic::{Bound, Expr, Sign, SymbolKind};

/// A closed end of a state's domain.
struct ClosedEnd<'a> {
    model: &'a Model,
    dynamics: &'a Dynamics,
    state: usize,
    side: Side,
    end: Expr,
    rule: Option<AtEdge>,
}

/// Warns of closed ends that are likely a slip. Each warning rests on a proof.
pub(super) fn warn(model: &Model, dynamics: &Dynamics, diagnostics: &mut Diagnostics) {
    for (state, declared) in model.states.iter().enumerate() {
        let ends = [
            (Side::Lower, declared.domain.lower, declared.at_lower),
            (Side::Upper, declared.domain.upper, declared.at_upper),
        ];
        for (side, bound, rule) in ends {
            let Bound::Closed(end) = bound else {
                continue;
            };
            let end = ClosedEnd {
                model,
                dynamics,
                state,
                side,
                end,
                rule,
            };
            let findings = [end.start(), end.crossing()];
            findings
                .into_iter()
                .flatten()
                .for_each(|finding| diagnostics.push(finding));
        }
    }
}

impl ClosedEnd<'_> {
    /// A start on an end that the state never leaves.
    fn start(&self) -> Option<Diagnostic> {
        let pool = &self.model.pool;
        let state = &self.model.states[self.state];
        let absorbed = self.rule == Some(AtEdge::Absorb);
        if !absorbed && !self.at_rest() {
            return None;
        }
        let always = pool.equal(state.initial.expr, self.end).is_yes();
        if !always && !self.starts_here_by_default() {
            return None;
        }
        let (name, shown) = (&state.name, pool.format(self.end));
        let when = if always { "" } else { "at the default values " };
        let message =
            format!("{when}`{name}` starts on the end {shown} of its domain and stays there");
        let why = if absorbed {
            "the end absorbs: a state that is there never moves"
        } else {
            "drift and diffusion are both zero there: the state never moves"
        };
        Some(
            Diagnostic::warning(Code::InitialOnEdge, state.initial.span, message)
                .label(self.domain(), "the domain")
                .note(why)
                .hint("start inside the domain, or check what should happen at the end"),
        )
    }

    /// Whether the equation keeps a state that is on the end where it is.
    fn at_rest(&self) -> bool {
        let process = &self.dynamics.states[self.state];
        let all = process.diffusion.iter().chain([&process.drift]);
        all.into_iter()
            .all(|&e| self.model.pool.is_zero(self.at_end(e)).is_yes())
    }

    fn at_end(&self, e: Expr) -> Expr {
        let x = self.model.states[self.state].symbol;
        let there = [(x, self.end)].into_iter().collect();
        self.model.pool.substitute(e, &there)
    }

    fn starts_here_by_default(&self) -> bool {
        let pool = &self.model.pool;
        let defaults = self.model.parameters.iter();
        let values = defaults
            .filter_map(|p| Some((p.symbol, pool.number(p.value.clone()?))))
            .collect();
        let at = |e| pool.substitute(e, &values);
        let start = at(self.model.states[self.state].initial.expr);
        !pool.depends_on_kind(start, SymbolKind::Parameter)
            && pool.equal(start, at(self.end)).is_yes()
    }

    /// An equation that leads across the end, where nothing is said that stops it.
    fn crossing(&self) -> Option<Diagnostic> {
        if matches!(self.rule, Some(AtEdge::Absorb | AtEdge::Reflect)) {
            return None;
        }
        let (span, what) = self.noise().or_else(|| self.outward_drift())?;
        if classify(self.model, self.dynamics, self.state, self.side) == End::NotReached {
            return None;
        }
        let state = &self.model.states[self.state];
        let (name, end) = (&state.name, self.model.pool.format(self.end));
        let message = format!("the {what} at the closed end {end} of `{name}`'s domain");
        let why = match self.rule {
            Some(_) => {
                "`as_equation` leaves it to the equation, and the equation leads across the end"
            }
            None => "paths cross the end, and no `at_edge` says what happens there",
        };
        Some(
            Diagnostic::warning(Code::ClosedEndCrossed, span, message)
            .label(self.domain(), "the domain")
            .note(why)
            .hint("write at_edge = \"absorb\" or \"reflect\", widen the domain, or mend the formula"),
        )
    }

    fn noise(&self) -> Option<(Span, &'static str)> {
        let pool = &self.model.pool;
        let declared = &self.model.states[self.state].declared_diffusion;
        let crossing =
            |(_, formula): &&(usize, Formula)| pool.is_zero(self.at_end(formula.expr)).is_no();
        let (_, formula) = declared.iter().find(crossing)?;
        Some((formula.span, "diffusion does not vanish"))
    }

    fn outward_drift(&self) -> Option<(Span, &'static str)> {
        let drift = self.at_end(self.dynamics.states[self.state].drift);
        let outward = match self.side {
            Side::Lower => Sign::Negative,
            Side::Upper => Sign::Positive,
        };
        let span = self.model.states[self.state].drift.span;
        (self.model.pool.sign(drift) == outward).then_some((span, "drift points outward"))
    }

    fn domain(&self) -> Span {
        let state = &self.model.states[self.state];
        state.domain_span.unwrap_or(state.span)
    }
}
