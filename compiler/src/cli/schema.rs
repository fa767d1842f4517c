//! `driftwright schema`

use super::args::SchemaArgs;
use super::{Outcome, Status, output};
use crate::front;

/// Prints the JSON Schema of the model file.
pub(super) fn run(args: &SchemaArgs) -> Outcome {
    output::deliver(
        args.output.as_deref(),
        &format!("{:#}\n", front::json_schema()),
    )?;
    Ok(Status::Well)
}
