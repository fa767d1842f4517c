//! What must not compile, and what the author or the user is told then.
//!
//! Each case stands in `compile_fail/` with the message beside it. The messages quote the Rust compiler
//! that `.ci/run` names; where only its wording has changed, `TRYBUILD=overwrite` writes them anew.

#[test]
fn bad_models_and_bad_uses_are_refused_with_a_reason() {
    trybuild::TestCases::new().compile_fail("compile_fail/*.rs");
}
