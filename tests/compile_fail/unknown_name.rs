// A formula names something the model does not declare.
driftwright_macros::model!("unknown_name.toml");

fn main() {}
