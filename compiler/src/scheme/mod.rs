//! How each state is stepped, why, and what was rejected.

mod name;

pub use name::SchemeName;
