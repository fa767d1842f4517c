//! What each name means, and where it may be used.

use std::cell::RefCell;
use std::collections::{BTreeMap, BTreeSet};

use super::super::formula::{Ast, kink_at, lower};
use super::super::raw::{Name, RawFormula};
use super::place::Place;
use super::view::View;
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::model::Formula;
use crate::source::Span;
use crate::symbolic::{Bound, Expr, Function, Interval, Pool, Symbol, SymbolKind};

/// Levels to which a formula may nest once the definitions it uses have been put in.
const MAX_COMPOSED_DEPTH: u32 = 5_000;

/// The kinds of names.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Kind {
    Driver,
    Parameter,
    State,
    Where,
    Derived,
    Readout,
}

impl Kind {
    pub(super) fn noun(self) -> &'static str {
        match self {
            Self::Driver => "driver",
            Self::Parameter => "parameter",
            Self::State => "state",
            Self::Where => "sub-expression",
            Self::Derived => "derived quantity",
            Self::Readout => "readout",
        }
    }
}

/// A declared name.
#[derive(Clone, Debug)]
pub(super) struct Declared {
    pub(super) kind: Kind,
    pub(super) span: Span,
    /// Its formula; none where it was refused, or is not known yet.
    pub(super) value: Option<Expr>,
}

/// All names of a file.
pub(super) struct Scope {
    pub(super) pool: Pool,
    pub(super) time: Symbol,
    pub(super) names: BTreeMap<String, Declared>,
    used: RefCell<BTreeSet<String>>,
}

impl Scope {
    /// A scope with nothing but `t` and `pi`.
    pub(super) fn new(pool: Pool) -> Self {
        let time = pool.symbol("t", SymbolKind::Time);
        // Formulas in t are about what happens after the start.
        let lower = Bound::Open(pool.zero());
        pool.set_range(
            time,
            Interval {
                lower,
                upper: Bound::Infinite,
            },
        );
        Self {
            pool,
            time,
            names: BTreeMap::new(),
            used: RefCell::default(),
        }
    }

    /// Declares a name; a second meaning is refused.
    pub(super) fn declare(&mut self, kind: Kind, name: &Name, diagnostics: &mut Diagnostics) {
        if let Some(first) = self.names.get(&name.text) {
            let message = if kind == first.kind {
                format!("the {} `{}` is declared twice", kind.noun(), name.text)
            } else {
                format!("`{}` has two meanings", name.text)
            };
            diagnostics.push(
                Diagnostic::error(Code::NameTwice, name.span, message)
                    .label(name.span, format!("here a {}", kind.noun()))
                    .label(first.span, format!("first a {}", first.kind.noun()))
                    .hint("rename one of the two"),
            );
            return;
        }
        let value = match kind {
            Kind::Parameter => Some(
                self.pool
                    .var(self.pool.symbol(&name.text, SymbolKind::Parameter)),
            ),
            Kind::State => Some(
                self.pool
                    .var(self.pool.symbol(&name.text, SymbolKind::State)),
            ),
            _ => None,
        };
        self.insert(
            &name.text,
            Declared {
                kind,
                span: name.span,
                value,
            },
        );
    }

    /// Adds a name that is known to be new.
    pub(super) fn insert(&mut self, name: &str, declared: Declared) {
        self.names.insert(name.to_owned(), declared);
    }

    /// Gives a declared name its formula.
    pub(super) fn define(&mut self, kind: Kind, name: &str, value: Option<Expr>) {
        if let Some(declared) = self.names.get_mut(name).filter(|d| d.kind == kind) {
            declared.value = value;
        }
    }

    /// Whether any formula used the name.
    pub(super) fn is_used(&self, name: &str) -> bool {
        self.used.borrow().contains(name)
    }

    /// Notes a use outside formulas.
    pub(super) fn mark_used(&self, name: &str) {
        self.used.borrow_mut().insert(name.to_owned());
    }

    /// The names of a kind.
    pub(super) fn of_kind(&self, kind: Kind) -> impl Iterator<Item = &str> {
        let names = self
            .names
            .iter()
            .filter(move |(_, declared)| declared.kind == kind);
        names.map(|(name, _)| name.as_str())
    }

    /// A formula at a place, or its errors to the sink.
    pub(super) fn formula(
        &self,
        raw: &RawFormula,
        place: Place,
        diagnostics: &mut Diagnostics,
    ) -> Option<Formula> {
        let expr = self.lower(&raw.ast, place, diagnostics)?;
        Some(Formula {
            expr,
            text: raw.text.clone(),
            span: raw.span,
        })
    }

    /// The meaning of a tree at a place, or its errors to the sink. At places that Ito's rule is
    /// applied to, kinks are refused.
    pub(super) fn lower(
        &self,
        ast: &Ast,
        place: Place,
        diagnostics: &mut Diagnostics,
    ) -> Option<Expr> {
        let result = lower(&self.pool, ast, &View::new(self, place));
        let direct = kink_at(ast).map(|(function, span)| (function, span, None));
        let hidden = || result.is_ok().then(|| self.kink_in_names(ast)).flatten();
        let kink = if place.needs_derivatives() {
            direct.or_else(hidden)
        } else {
            None
        };
        let deep = result
            .as_ref()
            .is_ok_and(|&expr| self.pool.depth(expr) > MAX_COMPOSED_DEPTH);
        if deep {
            diagnostics.push(too_deep(ast.span));
        }
        let failed = kink.is_some() || deep;
        if let Some((function, span, name)) = kink {
            diagnostics.push(kink_error(function, span, name, place));
        }
        match result {
            Ok(expr) => (!failed).then_some(expr),
            Err(errors) => {
                errors.into_iter().for_each(|d| diagnostics.push(d));
                None
            }
        }
    }

    /// A kink of the names a formula uses.
    fn kink_in_names(&self, ast: &Ast) -> Option<(Function, Span, Option<String>)> {
        ast.names().into_iter().find_map(|(name, span)| {
            let function = self.pool.has_kink(self.names.get(name)?.value?)?;
            Some((function, span, Some(name.to_owned())))
        })
    }
}

fn too_deep(span: Span) -> Diagnostic {
    let message = format!(
        "the formula nests more than {MAX_COMPOSED_DEPTH} levels deep, with the definitions it uses put in"
    );
    Diagnostic::error(Code::NestedTooDeep, span, message)
        .hint("make a state or a parameter of a quantity half way")
}

/// A function with a kink where Ito's rule is applied, in the formula itself or in a name it uses.
fn kink_error(function: Function, span: Span, inner: Option<String>, place: Place) -> Diagnostic {
    let name = function.name();
    let message = match inner {
        Some(inner) => format!("`{inner}` uses `{name}`, which is not twice differentiable"),
        None => format!("`{name}` is not twice differentiable"),
    };
    let hint = match place {
        Place::Derived => "make it a readout, which takes any function, or use a smooth function",
        Place::Through(_) => "use a smooth function that is strictly monotone",
        _ => "claim something of a smooth function, or the mean of a readout",
    };
    Diagnostic::error(Code::Kink, span, message)
        .note(format!(
            "Ito's rule is applied to {}: where a path crosses the kink, a local-time term would be \
             missing",
            place.what()
        ))
        .hint(hint)
}
