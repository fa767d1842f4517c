// A parameter is misspelt.
driftwright_macros::model!("ferry.toml");

fn main() {
    let _ = ferry::Parameters { sigmas: 0.3, ..ferry::Parameters::default() };
}
