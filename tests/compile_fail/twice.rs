// A parameter is declared twice.
driftwright_macros::model!("twice.toml");

fn main() {}
