// A simulator cannot be made around its checks.
driftwright_macros::model!("ferry.toml");

fn main() {
    let _ = ferry::Ferry { parameters: ferry::Parameters::default() };
}
