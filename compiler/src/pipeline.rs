//! Every pass in order, with what holds after each.
//!
//! A model flows one way: text, typed model, Ito dynamics, plan, moments and claims, step program.
//! Nothing flows back, and each pass takes only the earlier passes' types, so nothing unchecked can be
//! run.

mod edit;
mod suggest;

pub use suggest::{Suggestion, suggestions};

use crate::analysis::claims::{ClaimResult, judge};
use crate::analysis::facts::{self, Fact};
use crate::analysis::moments::Moments;
use crate::calculus::{Dynamics, dynamics};
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::front;
use crate::model::Model;
use crate::program::{Program, lower};
use crate::scheme::{Plan, plan};
use crate::source::{SourceFile, Span};

/// What became of one model file: everything found wrong, and the model if it could be resolved.
pub struct Compilation {
    /// All findings, in the order of the file.
    pub diagnostics: Vec<Diagnostic>,
    /// The compiled model. None when the front found errors, or a step would take more operations than a
    /// program may have; there also when a later pass found errors,
    /// such as a refuted claim, so that the evidence can be shown. Only a compilation without errors
    /// may be run or generated from: ask [`Compilation::has_errors`].
    pub compiled: Option<Compiled>,
}

impl Compilation {
    /// Whether any finding is an error.
    pub fn has_errors(&self) -> bool {
        self.diagnostics.iter().any(Diagnostic::is_error)
    }
}

/// A model with all that was derived from it.
pub struct Compiled {
    /// What the author declared. After the front: every name has one meaning, every formula is in time,
    /// parameters and states only, derived quantities are twice differentiable.
    pub model: Model,
    /// After the calculus: Ito drifts of all states (Stratonovich drifts converted) and Ito's rule on
    /// each derived quantity, with the working.
    pub dynamics: Dynamics,
    /// After the scheme choice: each state has a coordinate and is in exactly one group; a group called
    /// exact has passed Ito's rule and the zero test on every identity its law rests on.
    pub plan: Plan,
    /// Moments and laws of formulas, worked out on demand.
    pub moments: Moments,
    /// After the claims: one verdict each, in the file's order; each refuted one is an error too.
    pub claims: Vec<ClaimResult>,
    /// After the claims: what is known of ends, growth, noise, martingales and moments, with its conditions.
    pub facts: Vec<Fact>,
    /// After lowering: the step program, verified; both back ends follow it operation by operation.
    pub program: Program,
}

/// Runs every pass on a model file.
///
/// ```
/// use driftwright::pipeline::compile;
/// use driftwright::source::SourceFile;
///
/// let text = r#"
/// [model]
/// name = "level"
/// drivers = ["W"]
/// [parameters]
/// s = { value = 2, range = "(0, inf)" }
/// [states.X]
/// initial = "0"
/// drift = "0"
/// diffusion = "s"
/// [claims]
/// square = { drift_of = "X^2", is = "s^2" }
/// "#;
/// let compilation = compile(&SourceFile::new("level.toml", text));
/// assert!(!compilation.has_errors());
/// assert_eq!(compilation.compiled.unwrap().claims[0].verdict.name(), "proved");
/// ```
pub fn compile(source: &SourceFile) -> Compilation {
    let mut diagnostics = Diagnostics::new();
    let compiled =
        front::read(source, &mut diagnostics).and_then(|model| passes(model, &mut diagnostics));
    Compilation {
        diagnostics: diagnostics.finish(),
        compiled,
    }
}

/// The passes after the front; none where no step program could be made.
fn passes(model: Model, diagnostics: &mut Diagnostics) -> Option<Compiled> {
    let dynamics = dynamics(&model);
    let plan = plan(&model, &dynamics, diagnostics);
    let moments = Moments::new(&model, &dynamics);
    let claims = judge(&model, &dynamics, &moments, diagnostics);
    let facts = facts::find(&model, &dynamics, &moments);
    let program = match lower(&model, &plan, &facts) {
        Ok(program) => program,
        Err(too_large) => {
            let at = model.states.first().map_or(Span::default(), |s| s.span);
            let hint = "states that read one another, and drivers that move one state, count in \
                        pairs: split the model into several, or let fewer depend on one another";
            let found = Diagnostic::error(Code::ProgramTooLarge, at, too_large.to_string());
            diagnostics.push(found.hint(hint));
            return None;
        }
    };
    Some(Compiled {
        model,
        dynamics,
        plan,
        moments,
        claims,
        facts,
        program,
    })
}
