//! Facts beside the model: exact laws, commutativity, what happens at the ends of a domain, growth.

pub mod assume;
pub mod asymptotics;
pub mod boundary;
pub mod commute;
pub mod coordinate;
pub mod dependence;
pub mod free;
pub mod growth;
pub mod limits;
pub mod linear;
mod noise;
pub mod sample;
