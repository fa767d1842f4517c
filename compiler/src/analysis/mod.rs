//! Facts beside the model: exact laws, commutativity, what happens at the ends of a domain, growth,
//! moments, claims.

pub mod assume;
pub mod asymptotics;
pub mod boundary;
pub mod claims;
pub mod commute;
pub mod condition;
pub mod coordinate;
pub mod dependence;
pub mod end_rules;
pub mod facts;
pub mod free;
pub mod growth;
pub mod integral_test;
pub mod limits;
pub mod linear;
pub mod linear_flow;
pub mod moments;
mod noise;
pub mod random_drift;
pub mod sample;
pub mod scalar;
pub mod square_root;
