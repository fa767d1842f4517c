//! `replay TARGET FILE...` runs the check of a fuzz target on files, without the fuzzer; `replay show
//! FILE...` prints the models that files of the structured corpus stand for.

use std::env;
use std::process::ExitCode;

use driftwright_fuzzing::{formula, generate, model};

const USAGE: &str = "replay model_bytes|formula_text|structured_model|show FILE...";

fn main() -> ExitCode {
    let mut arguments = env::args().skip(1);
    let Some(run) = arguments.next().as_deref().and_then(action) else {
        eprintln!("{USAGE}");
        return ExitCode::FAILURE;
    };
    let mut status = ExitCode::SUCCESS;
    for path in arguments {
        match std::fs::read(&path) {
            Ok(bytes) => run(&bytes),
            Err(error) => {
                eprintln!("{path}: {error}");
                status = ExitCode::FAILURE;
            }
        }
    }
    status
}

fn action(name: &str) -> Option<fn(&[u8])> {
    Some(match name {
        "model_bytes" => model::check_bytes,
        "formula_text" => |bytes| formula::check(&String::from_utf8_lossy(bytes)),
        "structured_model" => |bytes| model::check_text(&generate::model(bytes)),
        "show" => |bytes| println!("{}", generate::model(bytes)),
        _ => return None,
    })
}
