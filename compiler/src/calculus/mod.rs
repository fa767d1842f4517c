//! Ito's rule, Stratonovich conversion, claims.
