//! The command line: one thin file a command, and what they share.

mod args;
mod check;
mod compare;
mod completions;
mod coupled;
mod derive;
mod fan_chart;
mod format;
mod generate;
mod interrupt;
mod load;
mod output;
mod parse;
mod paths_file;
mod progress;
mod run;
mod sample;
mod schema;
mod signoff;
mod simulate;
mod summary;
mod verify;

pub use args::Cli;

use std::process::ExitCode;

use clap::Parser;

use args::Command;

/// How a command ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
enum Status {
    /// All is well.
    Well,
    /// A claim or a verification did not hold.
    NotHeld,
    /// The input or the command line is wrong; nothing was written.
    Wrong,
}

/// Why a command could not be carried out, in words for the person who typed it.
#[derive(Debug)]
struct Failure(String);

impl<T: std::fmt::Display> From<T> for Failure {
    fn from(reason: T) -> Self {
        Self(reason.to_string())
    }
}

/// The outcome of a command.
type Outcome = Result<Status, Failure>;

/// Reads the command line, carries it out, and returns the exit status of the contract.
pub fn main() -> ExitCode {
    let mut cli = Cli::parse();
    cli.command.leave_out_signoffs();
    let outcome = match &cli.command {
        Command::Check(args) => check::run(args),
        Command::Derive(args) => derive::run(args),
        Command::Generate(args) => generate::run(args),
        Command::Simulate(args) => simulate::run(args),
        Command::Verify(args) => verify::run(args),
        Command::Compare(args) => compare::run(args),
        Command::Signoff(args) => signoff::run(args),
        Command::Format(args) => format::run(args),
        Command::Schema(args) => schema::run(args),
        Command::Completions(args) => completions::run(args),
    };
    let status = outcome.unwrap_or_else(|Failure(reason)| {
        output::complain(&reason);
        Status::Wrong
    });
    ExitCode::from(status as u8)
}
