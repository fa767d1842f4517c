// An exact scheme is asked for where no exact law is known.
driftwright_macros::model!("no_exact_law.toml");

fn main() {}
