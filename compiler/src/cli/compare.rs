//! `driftwright compare`

use std::ffi::OsString;
use std::io;
use std::path::Path;
use std::process::Command;

use super::args::{CompareArgs, CompareFormat};
use super::load::{Loaded, compile, load_and_show};
use super::{Failure, Outcome, Status, output};
use crate::meaning::{Meaning, compare};
use crate::report::text::Style;
use crate::report::{self, comparison};
use crate::source::SourceFile;

/// Shows what changed in meaning between two versions.
pub(super) fn run(args: &CompareArgs) -> Outcome {
    let old = match &args.since {
        Some(revision) => {
            let loaded = compile(at_revision(&args.old, revision)?);
            loaded.show_diagnostics();
            Some(loaded).filter(|l| l.compiled().is_some())
        }
        None => load_and_show(&args.old),
    };
    let new = load_and_show(args.new.as_ref().unwrap_or(&args.old));
    let (Some(old), Some(new)) = (old, new) else {
        return Ok(Status::Wrong);
    };
    let text = shown(args, &old, &new);
    output::deliver(args.output.as_deref(), &text)?;
    Ok(Status::Well)
}

fn shown(args: &CompareArgs, old: &Loaded, new: &Loaded) -> String {
    let (Some(before), Some(now)) = (old.compiled(), new.compiled()) else {
        return String::new();
    };
    let found = compare(&Meaning::of(&before.model), &now.model);
    let versions = [old.source.path(), new.source.path()];
    let document = || comparison::comparison(before, now, &found, versions);
    match args.format {
        CompareFormat::Text => {
            let colour = args.output.is_none() && output::colour_on(&io::stdout());
            let style = Style {
                colour,
                ..Style::default()
            };
            report::text::write(&document(), style)
        }
        CompareFormat::Markdown => report::markdown::write(&document()),
        CompareFormat::Html => report::html::write(&document()),
        CompareFormat::Json => format!("{:#}\n", comparison::json(before, now, &found, versions)),
    }
}

/// The file as it was at a revision of the repository it is in.
fn at_revision(path: &Path, revision: &str) -> Result<SourceFile, Failure> {
    let folder = path.parent().filter(|p| !p.as_os_str().is_empty());
    let name = path.file_name().unwrap_or(path.as_os_str());
    let mut object = OsString::from(format!("{revision}:./"));
    object.push(name);
    let ran = Command::new("git")
        .arg("-C")
        .arg(folder.unwrap_or(Path::new(".")))
        // What follows is an object, whatever it begins with.
        .args(["show", "--end-of-options"])
        .arg(&object)
        .output()
        .map_err(|error| Failure(format!("git cannot be run: {error}")))?;
    let shown = object.to_string_lossy();
    if !ran.status.success() {
        let reason = String::from_utf8_lossy(&ran.stderr).trim().to_owned();
        return Err(Failure(format!("git does not know {shown}: {reason}")));
    }
    let text =
        String::from_utf8(ran.stdout).map_err(|_| Failure(format!("{shown} is not UTF-8 text")))?;
    Ok(SourceFile::new(
        format!("{} at {revision}", path.display()),
        text,
    ))
}
