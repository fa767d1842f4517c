//! How the states of a model are stepped: exact laws found, schemes chosen, ends of domains.

mod calm;
mod carried;
mod catalogue;
mod ends;
mod exact_laws;
mod implicit;
mod linear_flow;
mod random_drift;
mod schemes;
mod square_root;
mod support;
