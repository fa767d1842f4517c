//! Diagnostics for programs: section 5 of the language.

use serde_json::{Value, json};

use super::Diagnostic;
use crate::source::SourceFile;

/// The `check --format json` document of several files, in the order given.
pub fn json<'a>(files: impl IntoIterator<Item = (&'a SourceFile, &'a [Diagnostic])>) -> Value {
    let files: Vec<Value> = files
        .into_iter()
        .map(|(source, diagnostics)| {
            let diagnostics: Vec<Value> = diagnostics
                .iter()
                .map(|diagnostic| diagnostic_json(source, diagnostic))
                .collect();
            json!({ "path": source.path(), "diagnostics": diagnostics })
        })
        .collect();
    json!({ "files": files })
}

/// One diagnostic. Lines and columns count from 1, columns in Unicode scalar values; the end is one
/// past the last character. `hint` is null where there is none.
pub fn diagnostic_json(source: &SourceFile, diagnostic: &Diagnostic) -> Value {
    let start = source.position(diagnostic.span.start);
    let end = source.position(diagnostic.span.end);
    let labels: Vec<Value> = diagnostic
        .labels
        .iter()
        .map(|label| {
            let at = source.position(label.span.start);
            json!({ "line": at.line, "column": at.column, "text": label.text })
        })
        .collect();
    json!({
        "code": diagnostic.code.id(),
        "severity": diagnostic.severity.name(),
        "message": diagnostic.message,
        "line": start.line,
        "column": start.column,
        "end_line": end.line,
        "end_column": end.column,
        "hint": diagnostic.hint,
        "notes": diagnostic.notes,
        "labels": labels,
    })
}
