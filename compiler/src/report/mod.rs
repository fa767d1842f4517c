//! What the compiler found, for those who read it: one neutral [`Document`], and writers for it.
//!
//! [`dossier`] builds the derivation a reviewer signs, [`on_the_spot`] Ito's rule for one formula;
//! [`text`] and [`markdown`] write a document, [`json`] the same facts for programs. Everything shown
//! was logged by the pass that did the work; nothing is derived again here.

mod claims;
pub mod comparison;
pub mod document;
mod dossier;
mod dynamics;
mod facts;
pub mod html;
mod influences;
pub mod json;
pub mod latex;
pub mod markdown;
mod math;
mod methods;
pub mod number;
mod spell;
mod statement;
mod suggestions;
pub mod text;
mod trace;
mod wrap;

pub use claims::{claim_table, statement as claim_statement, verdict_mark};
pub use document::Document;
pub use dossier::{dossier, on_the_spot};
pub use dynamics::{derived_summary, state_equations};
pub use methods::{method_line, method_table};

use crate::analysis::claims::ClaimResult;
use crate::analysis::facts::Fact;
use crate::calculus::Dynamics;
use crate::diagnostic::Diagnostic;
use crate::model::Model;
use crate::pipeline::{Compiled, Suggestion};
use crate::scheme::Plan;

/// Everything about one model that a report shows.
#[derive(Clone, Copy)]
pub struct Derivation<'a> {
    /// What the author declared.
    pub model: &'a Model,
    /// Ito dynamics of states and derived quantities.
    pub dynamics: &'a Dynamics,
    /// How each state is stepped.
    pub plan: &'a Plan,
    /// The claims' verdicts, in file order.
    pub claims: &'a [ClaimResult],
    /// What is known of ends, growth, noise, martingales and moments.
    pub facts: &'a [Fact],
    /// What the author could write instead.
    pub suggestions: &'a [Suggestion],
    /// What was found on the way.
    pub diagnostics: &'a [Diagnostic],
}

impl<'a> Derivation<'a> {
    /// Everything about a compiled model, with what was found on the way.
    pub fn new(compiled: &'a Compiled, diagnostics: &'a [Diagnostic]) -> Self {
        Self {
            model: &compiled.model,
            dynamics: &compiled.dynamics,
            plan: &compiled.plan,
            claims: &compiled.claims,
            facts: &compiled.facts,
            suggestions: &[],
            diagnostics,
        }
    }

    /// The same with suggestions.
    #[must_use]
    pub fn with_suggestions(self, suggestions: &'a [Suggestion]) -> Self {
        Self {
            suggestions,
            ..self
        }
    }
}
