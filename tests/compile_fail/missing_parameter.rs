// A parameter without a default value is not given.
driftwright_macros::model!("savings.toml");

fn main() {
    let _ = savings::Parameters::new(savings::Required { S0: 100.0 });
}
