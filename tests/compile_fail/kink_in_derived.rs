// A derived quantity is not twice differentiable.
driftwright_macros::model!("kink_in_derived.toml");

fn main() {}
