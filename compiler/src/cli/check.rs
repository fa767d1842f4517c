//! `driftwright check`

use std::io;

use super::args::{CheckArgs, CheckFormat};
use super::load::{Loaded, load};
use super::{Failure, Outcome, Status, output, signoff};
use crate::analysis::claims::Verdict;
use crate::diagnostic::{self, Code, Diagnostic, Severity, explain, human};
use crate::pipeline::Compiled;
use crate::source::SourceFile;

/// Checks the files, or explains a code.
pub(super) fn run(args: &CheckArgs) -> Outcome {
    if let Some(code) = &args.explain {
        return explanation(code);
    }
    let mut files: Vec<Loaded> = args.files.iter().map(|path| load(path)).collect();
    if args.require_signoff {
        for (path, file) in args.files.iter().zip(&mut files) {
            let objection = signoff::objection(path, file);
            file.diagnostics.extend(objection);
        }
    }
    match args.format {
        CheckFormat::Human => {
            let colour = output::colour_on(&io::stdout());
            let mut text = String::new();
            for file in &files {
                text.push_str(&human(&file.source, &file.diagnostics, colour));
                text.push_str(&summary(file));
            }
            output::print(&text)?;
        }
        CheckFormat::Json => {
            output::print(&format!("{:#}\n", diagnostic::json(found(&files))))?;
        }
        CheckFormat::Sarif => {
            output::print(&format!("{:#}\n", diagnostic::sarif(found(&files))))?;
        }
    }
    Ok(files
        .iter()
        .map(|file| status(file, args.deny_warnings))
        .max()
        .unwrap_or(Status::Well))
}

fn found(files: &[Loaded]) -> impl Iterator<Item = (&SourceFile, &[Diagnostic])> {
    files.iter().map(|f| (&f.source, f.diagnostics.as_slice()))
}

fn status(file: &Loaded, deny_warnings: bool) -> Status {
    if deny_warnings && !file.diagnostics.is_empty() {
        Status::Wrong.max(file.status())
    } else {
        file.status()
    }
}

/// One line a file: is it fine, which claims hold, how it will be stepped.
fn summary(file: &Loaded) -> String {
    let count = |severity| {
        file.diagnostics
            .iter()
            .filter(|d| d.severity == severity)
            .count()
    };
    let (errors, warnings) = (count(Severity::Error), count(Severity::Warning));
    let mut parts = Vec::new();
    if errors > 0 {
        parts.push(plural(errors, "error"));
    }
    if warnings > 0 {
        parts.push(plural(warnings, "warning"));
    }
    if parts.is_empty() {
        parts.push("fine".to_owned());
    }
    if let Some(compiled) = file.compiled() {
        let claims = |verdict| {
            compiled
                .claims
                .iter()
                .filter(|c| c.verdict == verdict)
                .count()
        };
        for verdict in [Verdict::Proved, Verdict::Refuted, Verdict::Open] {
            if claims(verdict) > 0 {
                parts.push(format!(
                    "{} {}",
                    plural(claims(verdict), "claim"),
                    verdict.name()
                ));
            }
        }
        parts.extend(schemes(compiled));
        let exceeded = compiled.model.pool.exceeded();
        if !exceeded.is_empty() {
            let passes: Vec<&str> = exceeded.iter().map(|limit| limit.pass()).collect();
            parts.push(format!("over budget in {}", passes.join(", ")));
        }
    }
    format!("{}: {}\n", file.source.path(), parts.join("; "))
}

/// The states by the scheme that steps them, in the order in which the schemes first appear.
fn schemes(compiled: &Compiled) -> Vec<String> {
    let mut found: Vec<(&str, Vec<&str>)> = Vec::new();
    for group in &compiled.plan.groups {
        let scheme = group.scheme.name();
        let names = group
            .states
            .iter()
            .map(|&s| compiled.model.states[s].name.as_str());
        match found.iter_mut().find(|(known, _)| *known == scheme) {
            Some((_, all)) => all.extend(names),
            None => found.push((scheme, names.collect())),
        }
    }
    found
        .iter()
        .map(|(scheme, names)| format!("{} by {scheme}", shortened(names)))
        .collect()
}

/// The names, of long lists the first few.
fn shortened(names: &[&str]) -> String {
    const SHOWN: usize = 3;
    const WHOLE: usize = 8;
    if names.len() <= WHOLE {
        return names.join(", ");
    }
    let shown = names[..SHOWN].join(", ");
    format!("{shown} and {} more", names.len() - SHOWN)
}

fn plural(count: usize, noun: &str) -> String {
    if count == 1 {
        format!("1 {noun}")
    } else {
        format!("{count} {noun}s")
    }
}

fn explanation(code: &str) -> Outcome {
    match explain(code) {
        Some(page) => {
            output::print(&page)?;
            Ok(Status::Well)
        }
        None => {
            let first = Code::ALL.first().map_or("", |c| c.id());
            let last = Code::ALL.last().map_or("", |c| c.id());
            Err(Failure(format!(
                "there is no code `{code}`: codes run from {first} to {last} and stand in brackets at the \
                 head of each diagnostic"
            )))
        }
    }
}
