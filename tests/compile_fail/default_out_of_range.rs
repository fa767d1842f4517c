// A default value lies outside its own range.
driftwright_macros::model!("default_out_of_range.toml");

fn main() {}
