//! Model texts as plans.

use driftwright::calculus;
use driftwright::diagnostic::{Diagnostic, Diagnostics};
use driftwright::front;
use driftwright::model::Model;
use driftwright::scheme::{self, Plan};
use driftwright::source::SourceFile;

/// A model with its plan and what was said about it.
pub(crate) struct Planned {
    pub(crate) model: Model,
    pub(crate) plan: Plan,
    pub(crate) found: Vec<Diagnostic>,
}

/// Reads and plans a model.
pub(crate) fn plan(text: &str) -> Planned {
    let mut diagnostics = Diagnostics::new();
    let source = SourceFile::new("model.toml", text);
    let Some(model) = front::read(&source, &mut diagnostics) else {
        panic!("{text}\n{:?}", diagnostics.finish());
    };
    let dynamics = calculus::dynamics(&model);
    let plan = scheme::plan(&model, &dynamics, &mut diagnostics);
    Planned {
        model,
        plan,
        found: diagnostics.finish(),
    }
}
