//! `driftwright format`

use std::collections::BTreeSet;
use std::fs;
use std::io;
use std::path::Path;

use super::args::FormatArgs;
use super::output::OutputFile;
use super::{Failure, Outcome, Status, output};
use crate::diagnostic::{Diagnostic, human};
use crate::front;
use crate::front::layout::{self, Refusal};
use crate::source::SourceFile;

/// Lays out the files, or looks whether they are; where one cannot be, none is written.
pub(super) fn run(args: &FormatArgs) -> Outcome {
    let mut status = Status::Well;
    let mut changed = Vec::new();
    let mut seen = BTreeSet::new();
    for path in &args.files {
        if !seen.insert(fs::canonicalize(path).unwrap_or_else(|_| path.clone())) {
            continue;
        }
        if !args.check && fs::metadata(path).is_ok_and(|m| !m.is_file() && !m.is_dir()) {
            return Err(Failure(format!(
                "{} is not a file that can be written in place; --check only looks",
                path.display()
            )));
        }
        match canonical(path)? {
            None => status = Status::Wrong,
            // What is on the disk may also differ by a byte order mark.
            Some(text) if fs::read(path)? != text.as_bytes() => changed.push((path, text)),
            Some(_) => {}
        }
    }
    if args.check {
        let names = changed.iter().map(|(path, _)| path.display());
        let lines: Vec<String> = names
            .map(|name| format!("{name}: would change\n"))
            .collect();
        output::print(&lines.concat())?;
        return Ok(match changed.is_empty() {
            true => status,
            false => status.max(Status::NotHeld),
        });
    }
    if status == Status::Well {
        let mut files = Vec::new();
        for (path, text) in &changed {
            let mut file = OutputFile::create(path)?;
            file.write_text(text)?;
            files.push(file);
        }
        output::commit_all(files)?;
    }
    Ok(status)
}

/// The canonical text of a file; none where it is wrong (the reasons are shown).
fn canonical(path: &Path) -> Result<Option<String>, Failure> {
    let source = match front::load(path) {
        Ok(source) => source,
        Err(diagnostic) => {
            show(
                &SourceFile::new(path.display().to_string(), ""),
                &[diagnostic],
            );
            return Ok(None);
        }
    };
    match layout::format(&source) {
        Ok(text) => Ok(Some(text)),
        Err(Refusal::Errors(found)) => {
            show(&source, &found);
            Ok(None)
        }
        Err(Refusal::Meaning(what)) => Err(Failure(format!(
            "{} is left as it is: in the canonical layout {what} would mean something else; \
             please report this fault with the file",
            path.display()
        ))),
    }
}

fn show(source: &SourceFile, found: &[Diagnostic]) {
    output::note(&human(source, found, output::colour_on(&io::stderr())));
}
