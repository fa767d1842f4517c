//! The sink the passes write to.

use super::Diagnostic;

/// Collects diagnostics. It cannot be forgotten: dropping one that still holds findings is an
/// internal fault, [`Diagnostics::finish`] takes them out.
///
/// ```
/// use driftwright::diagnostic::{Code, Diagnostic, Diagnostics};
/// use driftwright::source::Span;
/// let mut diagnostics = Diagnostics::new();
/// diagnostics.push(Diagnostic::warning(Code::UnusedParameter, Span::new(3, 5), "`mu` is not used"));
/// assert!(!diagnostics.has_errors());
/// assert_eq!(diagnostics.finish().len(), 1);
/// ```
#[derive(Debug, Default)]
#[must_use = "the findings must be shown: call `finish`"]
pub struct Diagnostics {
    found: Vec<Diagnostic>,
}

impl Diagnostics {
    /// An empty sink.
    pub fn new() -> Self {
        Self::default()
    }

    /// Takes one finding.
    pub fn push(&mut self, diagnostic: Diagnostic) {
        self.found.push(diagnostic);
    }

    /// Whether any of the findings is an error.
    pub fn has_errors(&self) -> bool {
        self.found.iter().any(Diagnostic::is_error)
    }

    /// How many of the findings are errors.
    pub fn error_count(&self) -> usize {
        self.found.iter().filter(|d| d.is_error()).count()
    }

    /// The findings so far, in the order they were made.
    pub fn iter(&self) -> impl Iterator<Item = &Diagnostic> {
        self.found.iter()
    }

    /// The findings in the order of the file, each once.
    pub fn finish(mut self) -> Vec<Diagnostic> {
        let mut found = std::mem::take(&mut self.found);
        found.sort_by_key(|d| (d.span, d.severity, d.code));
        found.dedup();
        found
    }
}

impl Drop for Diagnostics {
    fn drop(&mut self) {
        if !self.found.is_empty() && !std::thread::panicking() {
            panic!(
                "internal fault: diagnostics were dropped unseen: {:?}",
                self.found
            );
        }
    }
}
