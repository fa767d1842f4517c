//! Diagnostics for people: the line, the characters, the reason and the way out.

use annotate_snippets::{AnnotationKind, Group, Level, Origin, Renderer, Snippet};

use super::{Diagnostic, Severity};
use crate::source::{SourceFile, Span};

/// Renders diagnostics of one file for a terminal; escape codes only where `colour` is set.
///
/// A file that could not be read has no text: then only its path is shown.
pub fn human(source: &SourceFile, diagnostics: &[Diagnostic], colour: bool) -> String {
    let renderer = if colour {
        Renderer::styled().hyperlink(false)
    } else {
        Renderer::plain()
    };
    let mut out = String::new();
    for diagnostic in diagnostics {
        out.push_str(&renderer.render(&[group(source, diagnostic)]));
        out.push_str("\n\n");
    }
    out
}

fn group<'a>(source: &'a SourceFile, diagnostic: &'a Diagnostic) -> Group<'a> {
    let level = match diagnostic.severity {
        Severity::Error => Level::ERROR,
        Severity::Warning => Level::WARNING,
    };
    let title = level
        .primary_title(diagnostic.message.as_str())
        .id(diagnostic.code.id());
    let group = if source.text().is_empty() {
        title.element(Origin::path(source.path()))
    } else {
        title.element(snippet(source, diagnostic))
    };
    let notes = diagnostic.notes.iter();
    let hints = diagnostic.hint.iter();
    group
        .elements(notes.map(|note| Level::NOTE.message(note.as_str())))
        .elements(hints.map(|hint| Level::HELP.message(hint.as_str())))
}

fn snippet<'a>(
    source: &'a SourceFile,
    diagnostic: &'a Diagnostic,
) -> Snippet<'a, annotate_snippets::Annotation<'a>> {
    let own = diagnostic.labels.iter().find(|l| l.span == diagnostic.span);
    let others = diagnostic
        .labels
        .iter()
        .filter(|l| l.span != diagnostic.span);
    let primary = AnnotationKind::Primary
        .span(inside(source, diagnostic.span))
        .label(own.map(|label| label.text.as_str()));
    Snippet::source(source.text())
        .path(source.path())
        .annotation(primary)
        .annotations(others.map(|label| {
            AnnotationKind::Context
                .span(inside(source, label.span))
                .label(label.text.as_str())
        }))
}

/// The span, cut to the text and to whole characters.
fn inside(source: &SourceFile, span: Span) -> std::ops::Range<usize> {
    let text = source.text();
    let floor = |mut at: usize| {
        at = at.min(text.len());
        while !text.is_char_boundary(at) {
            at -= 1;
        }
        at
    };
    let start = floor(span.start);
    start..floor(span.end).max(start)
}
