// Code generated for a runtime of another version.
const _: () = driftwright_runtime::require_version::<driftwright_runtime::Version<0, 99>>();

fn main() {}
