//! `driftwright generate`

use super::args::GenerateArgs;
use super::load::load_and_show;
use super::{Outcome, Status, output};
use crate::back;

/// Writes the Rust source of the models, one module each.
pub(super) fn run(args: &GenerateArgs) -> Outcome {
    let mut text = String::new();
    let mut status = Status::Well;
    for path in &args.files {
        let Some(loaded) = load_and_show(path) else {
            status = Status::Wrong;
            continue;
        };
        status = status.max(loaded.status());
        if let Some(compiled) = loaded.compiled().filter(|_| status == Status::Well) {
            if !text.is_empty() {
                text.push('\n');
            }
            text.push_str(&back::rust::generate_source(&compiled.program));
        }
    }
    // Code is not evidence: where anything does not hold, there is none.
    if status == Status::Well {
        output::deliver(args.output.as_deref(), &text)?;
    }
    Ok(status)
}
