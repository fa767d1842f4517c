// A model that leaves values to the caller has no default parameters.
driftwright_macros::model!("savings.toml");

fn main() {
    let _ = savings::Savings::new(savings::Parameters::default());
}
