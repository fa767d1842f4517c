//! `driftwright derive`

use std::io;

use super::args::{DeriveArgs, DeriveFormat};
use super::load::{Loaded, load_and_show};
use super::{Outcome, Status, output};
use crate::calculus;
use crate::diagnostic::human;
use crate::front::{self, Place};
use crate::pipeline::{self, Compiled};
use crate::report::text::Style;
use crate::report::{self, Document};
use crate::source::SourceFile;

/// Writes the derivation of a model, or of one formula.
pub(super) fn run(args: &DeriveArgs) -> Outcome {
    let Some(loaded) = load_and_show(&args.file) else {
        return Ok(Status::Wrong);
    };
    let Some(compiled) = loaded.compiled() else {
        return Ok(Status::Wrong);
    };
    let text = match &args.of {
        Some(formula) => match on_the_spot(args, &loaded, compiled, formula) {
            Some(text) => text,
            None => return Ok(Status::Wrong),
        },
        None => {
            let suggestions = pipeline::suggestions(compiled);
            let derivation = loaded.derivation(compiled).with_suggestions(&suggestions);
            match args.format {
                DeriveFormat::Json => format!("{:#}\n", report::json::derivation(&derivation)),
                format => write(&report::dossier(&derivation), format, args.output.is_some()),
            }
        }
    };
    output::deliver(args.output.as_deref(), &text)?;
    Ok(loaded.status())
}

fn write(document: &Document, format: DeriveFormat, to_file: bool) -> String {
    match format {
        DeriveFormat::Markdown => report::markdown::write(document),
        DeriveFormat::Html => report::html::write(document),
        DeriveFormat::Latex => report::latex::write(document),
        DeriveFormat::Text | DeriveFormat::Json => {
            let colour = !to_file && output::colour_on(&io::stdout());
            report::text::write(
                document,
                Style {
                    colour,
                    ..Style::default()
                },
            )
        }
    }
}

/// Ito's rule for a formula of the command line; none where the formula is wrong (the reason is shown).
fn on_the_spot(
    args: &DeriveArgs,
    loaded: &Loaded,
    compiled: &Compiled,
    formula: &str,
) -> Option<String> {
    let source = SourceFile::new("--of", formula);
    let read = front::read_formula(&compiled.model, &source, Place::Derived);
    if let Err(found) = &read {
        output::note(&human(&source, found, output::colour_on(&io::stderr())));
    }
    let formula = read.ok()?.expr;
    let expansion = calculus::expand(&compiled.model, &compiled.dynamics.states, formula);
    let derivation = loaded.derivation(compiled);
    Some(match args.format {
        DeriveFormat::Json => format!("{:#}\n", report::json::on_the_spot(&derivation, &expansion)),
        format => write(
            &report::on_the_spot(&derivation, &expansion),
            format,
            args.output.is_some(),
        ),
    })
}
