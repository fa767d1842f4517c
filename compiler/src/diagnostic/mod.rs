//! What the tool tells people: one diagnostic type, one table of codes, renderers.
//!
//! A [`Diagnostic`] is data: a code, a place, what is wrong and what to do. Passes put them into a
//! [`Diagnostics`] sink, so that one run finds as many as it can; [`human`], [`json`] and [`sarif`]
//! render them.

mod codes;
mod render_human;
mod render_json;
mod render_sarif;
mod sink;

pub use codes::{Code, explain};
pub use render_human::human;
pub use render_json::{diagnostic_json, json};
pub use render_sarif::sarif;
pub use sink::Diagnostics;

use crate::source::Span;

/// How grave a diagnostic is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Severity {
    /// The model cannot be compiled.
    Error,
    /// The model compiles, yet something deserves a look.
    Warning,
}

impl Severity {
    /// `error` or `warning`.
    pub fn name(self) -> &'static str {
        match self {
            Self::Error => "error",
            Self::Warning => "warning",
        }
    }
}

/// A second place that helps to understand a diagnostic. On the diagnostic's own span it is the text
/// beside the marked characters.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Label {
    /// The place.
    pub span: Span,
    /// What is there.
    pub text: String,
}

/// One finding: what is wrong, where, what to do.
///
/// ```
/// use driftwright::diagnostic::{Code, Diagnostic};
/// use driftwright::source::Span;
/// let diagnostic = Diagnostic::error(Code::UnknownName, Span::new(9, 11), "`mo` is not declared")
///     .hint("did you mean `mu`?");
/// assert_eq!(diagnostic.code.id(), "DW0103");
/// ```
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    /// Its stable code.
    pub code: Code,
    /// Error or warning.
    pub severity: Severity,
    /// The offending characters.
    pub span: Span,
    /// What is wrong, in one sentence.
    pub message: String,
    /// What to do about it.
    pub hint: Option<String>,
    /// Other places that matter.
    pub labels: Vec<Label>,
    /// Background, a sentence each.
    pub notes: Vec<String>,
}

impl Diagnostic {
    /// An error at `span`.
    pub fn error(code: Code, span: Span, message: impl Into<String>) -> Self {
        Self::new(Severity::Error, code, span, message.into())
    }

    /// A warning at `span`.
    pub fn warning(code: Code, span: Span, message: impl Into<String>) -> Self {
        Self::new(Severity::Warning, code, span, message.into())
    }

    fn new(severity: Severity, code: Code, span: Span, message: String) -> Self {
        Self {
            code,
            severity,
            span,
            message,
            hint: None,
            labels: Vec::new(),
            notes: Vec::new(),
        }
    }

    /// Says what to do; a second hint continues the first.
    pub fn hint(mut self, text: impl Into<String>) -> Self {
        let text = text.into();
        self.hint = Some(match self.hint {
            Some(first) => format!("{first}; {text}"),
            None => text,
        });
        self
    }

    /// Adds the hint where there is one.
    pub fn maybe_hint(self, text: Option<String>) -> Self {
        match text {
            Some(text) => self.hint(text),
            None => self,
        }
    }

    /// Points at another place.
    pub fn label(mut self, span: Span, text: impl Into<String>) -> Self {
        self.labels.push(Label {
            span,
            text: text.into(),
        });
        self
    }

    /// Adds background.
    pub fn note(mut self, text: impl Into<String>) -> Self {
        self.notes.push(text.into());
        self
    }

    /// Whether it keeps the model from being compiled.
    pub fn is_error(&self) -> bool {
        self.severity == Severity::Error
    }
}
