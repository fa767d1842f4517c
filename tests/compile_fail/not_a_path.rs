// The macro takes a string.
driftwright_macros::model!(savings);

fn main() {}
