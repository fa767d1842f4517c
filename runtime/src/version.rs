//! The check that generated code and runtime belong together.

/// The version of the interface between generated code and runtime, as a type.
pub struct Version<const MAJOR: u32, const MINOR: u32>;

/// Implemented by the versions of generated code that this runtime can run.
#[diagnostic::on_unimplemented(
    message = "this simulator was generated for another version of `driftwright-runtime`",
    label = "generated for `{Self}`, which this `driftwright-runtime` cannot run",
    note = "generate the code again, or depend on the `driftwright-runtime` of the same version as the `driftwright` that generated it"
)]
pub trait Runs {}

impl Runs for Version<0, 1> {}

/// Compiles only for versions this runtime can run. Generated code holds one line:
///
/// ```
/// const _: () = driftwright_runtime::require_version::<driftwright_runtime::Version<0, 1>>();
/// ```
///
/// A version that does not fit stops the compiler with a sentence of its own:
///
/// ```compile_fail
/// const _: () = driftwright_runtime::require_version::<driftwright_runtime::Version<9, 9>>();
/// ```
pub const fn require_version<V: Runs>() {}
