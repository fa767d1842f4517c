//! `driftwright signoff`, and what `check --require-signoff` asks.

use std::fs;
use std::io;
use std::path::Path;

use jiff::Timestamp;
use jiff::tz::TimeZone;

use super::args::SignoffArgs;
use super::load::{Loaded, load_and_show};
use super::{Failure, Outcome, Status, output};
use crate::diagnostic::{Code, Diagnostic};
use crate::meaning::signoff::{Record, Standing, path_beside, standing, write};
use crate::meaning::{Comparison, Kind, Meaning};
use crate::source::Span;

/// Writes the sign-off beside the model. A model whose claims are refuted cannot be signed.
pub(super) fn run(args: &SignoffArgs) -> Outcome {
    let by = args.by.trim();
    if by.is_empty() || by.contains(char::is_control) {
        return Err(Failure("--by wants the reviewer's name".to_owned()));
    }
    let Some(loaded) = load_and_show(&args.file) else {
        return Ok(Status::Wrong);
    };
    let Some(compiled) = loaded.compiled() else {
        return Ok(Status::Wrong);
    };
    if loaded.status() != Status::Well {
        output::complain("a model with a refuted claim cannot be signed off");
        return Ok(loaded.status());
    }
    let record = Record {
        by: by.to_owned(),
        on: Timestamp::now().to_zoned(TimeZone::UTC).date().to_string(),
        note: args.note.clone(),
        meaning: Meaning::of(&compiled.model),
    };
    let path = path_beside(&args.file);
    output::deliver(Some(&path), &write(&record))?;
    output::note(&format!("{}: signed off by {by}\n", path.display()));
    Ok(Status::Well)
}

/// What stands against running a model that must be signed off; none where the sign-off is valid.
pub(super) fn objection(path: &Path, loaded: &Loaded) -> Option<Diagnostic> {
    let model = &loaded.compiled()?.model;
    let beside = path_beside(path);
    let text = match fs::read_to_string(&beside) {
        Ok(text) => Some(text),
        Err(error) if error.kind() == io::ErrorKind::NotFound => None,
        Err(error) => return Some(unreadable(&beside, &error.to_string())),
    };
    let sign = format!(
        "review `driftwright derive {0}`, then `driftwright signoff {0} --by NAME`",
        path.display()
    );
    match standing(model, text.as_deref()) {
        Standing::Valid(_) => None,
        Standing::Unsigned => {
            let message = format!(
                "the model is not signed off: there is no {}",
                beside.display()
            );
            Some(Diagnostic::error(Code::NotSignedOff, Span::default(), message).hint(sign))
        }
        Standing::Voided(record, comparison) => {
            let message = format!(
                "the sign-off of {} on {} is void: the model means something else since",
                record.by, record.on
            );
            let found = Diagnostic::error(Code::SignoffVoid, Span::default(), message).hint(sign);
            Some(since(&comparison).into_iter().fold(found, Diagnostic::note))
        }
        Standing::Unreadable(reason) => Some(unreadable(&beside, &reason)),
    }
}

fn unreadable(beside: &Path, reason: &str) -> Diagnostic {
    let message = format!(
        "the sign-off in {} does not count: {reason}",
        beside.display()
    );
    let hint = "restore the file from version control, or sign off anew";
    Diagnostic::error(Code::SignoffUnreadable, Span::default(), message).hint(hint)
}

/// What changed since a sign-off, a line each.
fn since(comparison: &Comparison) -> Vec<String> {
    let line = |change: &crate::meaning::Change| match &change.kind {
        Kind::Added(new) => format!("{}: added, {}", change.key, new.text()),
        Kind::Removed(old) => format!("{}: gone, was {}", change.key, old.text()),
        Kind::Changed { old, new, .. } => {
            format!("{}: was {}, is {}", change.key, old.text(), new.text())
        }
    };
    comparison.changes.iter().map(line).collect()
}
