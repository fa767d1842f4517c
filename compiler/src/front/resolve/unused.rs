//! Warnings about what no formula uses.

use super::super::raw::RawModel;
use super::Resolver;
use crate::diagnostic::{Code, Diagnostic};

impl Resolver<'_> {
    /// Parameters and drivers without a use. Silent where there are errors: a formula that could not be
    /// read may be the one that uses them.
    pub(super) fn unused(&mut self, raw: &RawModel) {
        if self.diagnostics.has_errors() {
            return;
        }
        for parameter in raw
            .parameters
            .iter()
            .filter(|p| !self.scope.is_used(&p.name.text))
        {
            let message = format!("no formula uses the parameter `{}`", parameter.name.text);
            self.diagnostics.push(
                Diagnostic::warning(Code::UnusedParameter, parameter.name.span, message)
                    .hint("remove it, or look for the term that is missing"),
            );
        }
        for driver in raw.drivers.iter().filter(|d| !self.scope.is_used(&d.text)) {
            let message = format!("no diffusion uses the driver `{}`", driver.text);
            self.diagnostics.push(
                Diagnostic::warning(Code::UnusedDriver, driver.span, message)
                    .hint("remove it, or look for the term that is missing"),
            );
        }
    }
}
