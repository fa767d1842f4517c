//! How each state is stepped, why, and what was rejected.

mod name;
mod plan;

pub use name::SchemeName;
pub use plan::{
    Becomes, Component, Coordinate, EdgeRule, Group, Kind, Law, LinearGaussian, Method,
    NoiseComponent, NoisePlan, Order, Plan, RowNoise, StateStep,
};
