// A parameter is a number.
driftwright_macros::model!("ferry.toml");

fn main() {
    let _ = ferry::Parameters { mu: "0.1", sigma: 0.2 };
}
