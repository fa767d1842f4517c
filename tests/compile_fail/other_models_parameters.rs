// The parameters of one model do not fit another.
driftwright_macros::model!("savings.toml");
driftwright_macros::model!("ferry.toml");

fn main() {
    let _ = savings::Savings::new(ferry::Parameters::default());
}
