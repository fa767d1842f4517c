//! Any bytes as a model file, through every pass.
#![no_main]

use driftwright_fuzz::watch::within_limit;
use driftwright_fuzzing::model;
use libfuzzer_sys::fuzz_target;

fuzz_target!(|bytes: &[u8]| within_limit(bytes, || model::check_bytes(bytes)));
