//! Tests of the runtime against things outside it, as one program.

mod collectors;
mod counts_and_waiting_times;
mod fragile;
mod generators;
mod grids;
mod levy_areas;
mod linear_algebra;
mod math_accuracy;
mod models;
mod normal_law;
mod reference;
mod simulation;
