// A parenthesis is not closed.
driftwright_macros::model!("open_parenthesis.toml");

fn main() {}
