//! Everything a run computes before it steps: the values of each step and observation.

use std::collections::BTreeMap;

use super::RunError;
use crate::grid::Grid;
use crate::simulator::{Shape, Simulator};

/// A table of rows; several entries may share one.
#[derive(Debug)]
struct Table {
    width: usize,
    rows: Vec<f64>,
    row_of: Vec<u32>,
}

impl Table {
    fn new(width: usize) -> Table {
        Table {
            width,
            rows: Vec::new(),
            row_of: Vec::new(),
        }
    }

    /// Adds a zeroed row, points a new entry at it and returns it with its number.
    fn push(&mut self) -> (u32, &mut [f64]) {
        let start = self.rows.len();
        let number = match start.checked_div(self.width) {
            Some(count) => count as u32,
            None => 0,
        };
        self.rows.resize(start + self.width, 0.0);
        self.row_of.push(number);
        (number, &mut self.rows[start..])
    }

    #[inline(always)]
    fn get(&self, entry: usize) -> &[f64] {
        let start = self.row_of[entry] as usize * self.width;
        &self.rows[start..start + self.width]
    }
}

/// The values of all steps and observations of a run.
#[derive(Debug)]
pub(super) struct Plan {
    steps: Table,
    observations: Table,
}

impl Plan {
    /// Computes the values. A simulator that does not depend on time needs one row for each
    /// length of step, and one for all observations.
    pub(super) fn new<S: Simulator>(simulator: &S, grid: &Grid) -> Result<Plan, RunError> {
        let shape = simulator.shape();
        Ok(Plan {
            steps: step_table(simulator, grid, &shape)?,
            observations: observation_table(simulator, grid, &shape)?,
        })
    }

    #[inline(always)]
    pub(super) fn step(&self, index: usize) -> &[f64] {
        self.steps.get(index)
    }

    #[inline(always)]
    pub(super) fn observation(&self, index: usize) -> &[f64] {
        self.observations.get(index)
    }
}

fn step_table<S: Simulator>(sim: &S, grid: &Grid, shape: &Shape<'_>) -> Result<Table, RunError> {
    let mut table = Table::new(shape.step_values);
    let mut known = BTreeMap::new();
    for step in grid.steps() {
        let bits = step.length.to_bits();
        if let Some(&row) = known.get(&bits) {
            table.row_of.push(row);
            continue;
        }
        let (row, values) = table.push();
        sim.step_values(step.start, step.length, values)
            .map_err(|error| RunError::Step {
                time: step.start,
                length: step.length,
                error,
            })?;
        if !shape.time_dependent {
            known.insert(bits, row);
        }
    }
    Ok(table)
}

fn observation_table<S: Simulator>(
    sim: &S,
    grid: &Grid,
    shape: &Shape<'_>,
) -> Result<Table, RunError> {
    let mut table = Table::new(shape.observation_values);
    for (i, observation) in grid.observations().iter().enumerate() {
        if i > 0 && !shape.time_dependent {
            table.row_of.push(0);
            continue;
        }
        let time = observation.time;
        let (_, values) = table.push();
        sim.observation_values(time, values)
            .map_err(|error| RunError::Observation { time, error })?;
    }
    Ok(table)
}
