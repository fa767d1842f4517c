//! How the states of a model are stepped: exact laws found, schemes chosen, ends of domains.

mod ends;
mod schemes;
mod support;
