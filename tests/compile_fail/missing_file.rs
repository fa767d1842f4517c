// The model file does not exist.
driftwright_macros::model!("models/no_such_model.toml");

fn main() {}
