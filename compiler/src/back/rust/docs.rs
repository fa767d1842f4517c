//! The documentation of generated items.

use proc_macro2::TokenStream;
use quote::quote;

use crate::program::{Output, OutputKind, Parameter, Program};

/// Lines as outer documentation.
pub(super) fn outer(lines: &[String]) -> TokenStream {
    let lines = lines.iter().map(|line| spaced(line));
    quote! { #(#[doc = #lines])* }
}

/// Lines as inner documentation.
pub(super) fn inner(lines: &[String]) -> TokenStream {
    let lines = lines.iter().map(|line| spaced(line));
    quote! { #(#![doc = #lines])* }
}

fn spaced(line: &str) -> String {
    if line.is_empty() {
        String::new()
    } else {
        format!(" {line}")
    }
}

/// The author's words, safe in Markdown: brackets and angles are no links and no tags.
fn plain(text: &str) -> String {
    let mut safe = String::new();
    for c in text.trim().chars() {
        if matches!(c, '[' | ']' | '<' | '>' | '*' | '_' | '`') {
            safe.push('\\');
        }
        safe.push(c);
    }
    safe
}

pub(super) fn module(program: &Program) -> Vec<String> {
    let mut lines = match &program.title {
        Some(title) => vec![plain(title)],
        None => vec![format!("The model `{}`.", program.name)],
    };
    if let Some(about) = &program.about {
        lines.push(String::new());
        lines.extend(about.trim().lines().map(plain));
    }
    lines
}

pub(super) fn parameter(parameter: &Parameter, field: &str) -> Vec<String> {
    let mut text = match &parameter.about {
        Some(about) => plain(about),
        None => format!("`{}`", parameter.name),
    };
    if let Some(unit) = &parameter.unit {
        text.push_str(&format!(", in `{unit}`"));
    }
    if parameter.name != field {
        text.push_str(&format!(", `{}` in the model", parameter.name));
    }
    let default = parameter
        .value
        .map(|value| format!("; {value:?} where not given"))
        .unwrap_or_default();
    vec![format!("{text}; in `{}`{default}.", parameter.range)]
}

pub(super) fn output(output: &Output) -> Vec<String> {
    let kind = match output.kind {
        OutputKind::State => "State",
        OutputKind::Derived => "Derived quantity",
        OutputKind::Readout => "Readout",
    };
    let mut text = format!("{kind} `{}`", output.name);
    if let Some(about) = &output.about {
        text.push_str(&format!(
            ": {}",
            plain(&about.split_whitespace().collect::<Vec<_>>().join(" "))
        ));
    }
    if let Some(formula) = &output.formula {
        text.push_str(&format!(
            ", `{}`",
            formula.split_whitespace().collect::<Vec<_>>().join(" ")
        ));
    }
    if let Some(unit) = &output.unit {
        text.push_str(&format!(", in `{unit}`"));
    }
    text.push('.');
    vec![text]
}
