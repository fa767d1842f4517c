// A key of a state is misspelt.
driftwright_macros::model!("unknown_key.toml");

fn main() {}
