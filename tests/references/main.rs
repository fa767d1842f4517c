//! The reference values in scope against the compiler and its simulators: transition laws (B), closed-form
//! prices (C), exact discrete moments and strong errors of schemes (E). Each case names its source in `tests/reference/`.

mod areas;
mod catalogue;
mod closed;
mod coupled;
mod ends;
mod estimate;
mod extrapolated;
mod implicit;
mod laws;
mod linear_flow;
mod model;
mod orders;
mod precise;
mod prices;
mod random_drift;
mod rates;
mod schemes;
mod square_root;
mod steep;
mod step_laws;
mod taylor;
mod variance;
