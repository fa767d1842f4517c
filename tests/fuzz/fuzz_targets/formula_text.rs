//! Any text as a formula: printing, derivatives, normal form, zero test, layout.
#![no_main]

use driftwright_fuzz::watch::within_limit;
use driftwright_fuzzing::formula;
use libfuzzer_sys::fuzz_target;

fuzz_target!(|text: &str| within_limit(text.as_bytes(), || formula::check(text)));
