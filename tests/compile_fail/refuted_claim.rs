// A claim forgets the Ito correction.
driftwright_macros::model!("refuted_claim.toml");

fn main() {}
