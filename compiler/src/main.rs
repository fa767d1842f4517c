//! The `driftwright` binary; everything it does stands in [`driftwright::cli`].

use std::process::ExitCode;

fn main() -> ExitCode {
    driftwright::cli::main()
}
