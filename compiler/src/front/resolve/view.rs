//! Names as seen from one place: what may be used there, and what was meant.

use std::collections::BTreeMap;

use super::super::formula::Names;
use super::super::suggest::did_you_mean;
use super::place::Place;
use super::scope::{Declared, Kind, Scope};
use crate::diagnostic::{Code, Diagnostic};
use crate::source::Span;
use crate::symbolic::{Expr, SymbolKind};

/// The names as seen from a place.
pub(super) struct View<'a> {
    scope: &'a Scope,
    place: Place,
}

impl Names for View<'_> {
    fn value(&self, name: &str, span: Span) -> Result<Option<Expr>, Diagnostic> {
        let scope = self.scope;
        if name == "t" {
            let allowed = self.place.allows_time();
            return if allowed {
                Ok(Some(scope.pool.var(scope.time)))
            } else {
                Err(self.refused("the time `t`", span))
            };
        }
        if name == "pi" {
            return Ok(Some(scope.pool.pi()));
        }
        let Some(declared) = scope.names.get(name) else {
            return Err(self.unknown(name, span));
        };
        scope.mark_used(name);
        if !self.place.allows(declared.kind) {
            let refused = self.refused(&format!("the {} `{name}`", declared.kind.noun()), span);
            return Err(match (declared.kind, self.place) {
                (Kind::Derived, Place::Coefficient | Place::Where) => {
                    refused.hint("put what they share in `[where]`")
                }
                (Kind::Driver, Place::Coefficient) => {
                    refused.hint("a driver stands as a key of `diffusion`")
                }
                _ => refused,
            });
        }
        let Some(value) = declared.value else {
            return Ok(None);
        };
        self.contents_allowed(name, value, span)
            .map(|()| Some(value))
    }

    fn kind(&self, name: &str) -> Option<&'static str> {
        match name {
            "t" | "pi" => Some("number"),
            _ => self
                .scope
                .names
                .get(name)
                .map(|declared| declared.kind.noun()),
        }
    }
}

impl<'a> View<'a> {
    pub(super) fn new(scope: &'a Scope, place: Place) -> Self {
        Self { scope, place }
    }

    /// Whether what a name stands for may be used here.
    fn contents_allowed(&self, name: &str, value: Expr, span: Span) -> Result<(), Diagnostic> {
        let pool = &self.scope.pool;
        for symbol in pool.symbols_of(value) {
            let inner = pool.symbol_name(symbol);
            let thing = match pool.symbol_kind(symbol) {
                SymbolKind::Time if !self.place.allows_time() => "the time `t`".to_owned(),
                SymbolKind::State if !self.place.allows_state(symbol) => {
                    format!("the state `{inner}`")
                }
                _ => continue,
            };
            let own = &*inner == name;
            let thing = if own {
                thing
            } else {
                format!("`{name}`, which uses {thing},")
            };
            return Err(self.refused(&thing, span));
        }
        Ok(())
    }

    fn refused(&self, thing: &str, span: Span) -> Diagnostic {
        let message = format!("{thing} may not be used in {}", self.place.what());
        Diagnostic::error(Code::NotAllowedHere, span, message).hint(format!(
            "{} holds {}",
            self.place.what(),
            self.place.holds()
        ))
    }

    fn unknown(&self, name: &str, span: Span) -> Diagnostic {
        let message = format!("`{name}` is not declared");
        let diagnostic = Diagnostic::error(Code::UnknownName, span, message);
        let hint = match name {
            "e" => Some("the number e is `exp(1)`".to_owned()),
            "inf" => Some("`inf` stands at the end of an interval only".to_owned()),
            "Inf" | "INF" | "infinity" | "Infinity" => {
                Some("an infinite end of an interval is written `inf`".to_owned())
            }
            "dt" | "dW" => {
                Some("write the coefficient alone, `dt` and `dW` are understood".to_owned())
            }
            _ => no_product(name, &self.scope.names)
                .or_else(|| did_you_mean(name, self.candidates())),
        };
        diagnostic.hint(hint.unwrap_or_else(|| "declare it, as a parameter for example".to_owned()))
    }

    /// The names that could have been meant here.
    fn candidates(&self) -> impl Iterator<Item = &str> {
        let declared = self
            .scope
            .names
            .iter()
            .filter(|(_, d)| self.place.allows(d.kind));
        let time = self.place.allows_time().then_some("t");
        declared
            .map(|(name, _)| name.as_str())
            .chain(time)
            .chain(["pi"])
    }
}

/// Two names written together, as in `muS`.
fn no_product(name: &str, names: &BTreeMap<String, Declared>) -> Option<String> {
    name.char_indices().skip(1).find_map(|(cut, _)| {
        let (left, right) = name.split_at(cut);
        let both = names.contains_key(left) && names.contains_key(right);
        both.then(|| format!("write `{left}*{right}` for a product"))
    })
}
