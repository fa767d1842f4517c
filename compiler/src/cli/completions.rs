//! `driftwright completions`

use clap::CommandFactory;

use super::args::{Cli, CompletionsArgs};
use super::{Outcome, Status, output};

/// Prints the completion script of a shell.
pub(super) fn run(args: &CompletionsArgs) -> Outcome {
    let mut script = Vec::new();
    clap_complete::generate(args.shell, &mut Cli::command(), "driftwright", &mut script);
    output::print(&String::from_utf8_lossy(&script))?;
    Ok(Status::Well)
}
