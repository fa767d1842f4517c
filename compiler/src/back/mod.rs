//! Back ends of the step program: Rust source and the interpreter.
