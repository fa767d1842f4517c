//! How each state is stepped, why, and what was rejected.
