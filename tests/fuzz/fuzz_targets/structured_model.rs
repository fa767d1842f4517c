//! Random models that mostly compile: everything behind the front end.
#![no_main]

use driftwright_fuzz::watch::within_limit;
use driftwright_fuzzing::{generate, model};
use libfuzzer_sys::fuzz_target;

fuzz_target!(|bytes: &[u8]| within_limit(bytes, || model::check_text(&generate::model(bytes))));
