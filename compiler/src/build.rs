//! What a user's build script calls.
