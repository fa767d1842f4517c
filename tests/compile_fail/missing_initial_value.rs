// The parameter that the initial value needs is not given.
driftwright_macros::model!("savings.toml");

fn main() {
    let _ = savings::Parameters::new(savings::Required { sigma: 0.2 });
}
