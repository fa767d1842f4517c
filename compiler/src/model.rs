//! The typed model: what the author declared, resolved.
