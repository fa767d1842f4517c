//! The time grid of a run: where it steps and where it observes.

use std::fmt;

/// Observation times and the steps that lead to them.
#[derive(Clone, Debug, PartialEq)]
pub struct Grid {
    steps: Vec<Step>,
    observations: Vec<Observation>,
}

/// One step in time.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Step {
    /// Where it starts.
    pub start: f64,
    /// How long it is. Equal steps have bit-identical lengths.
    pub length: f64,
}

/// One observation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Observation {
    /// The time, as the caller gave it.
    pub time: f64,
    /// The number of steps taken before it.
    pub steps_before: usize,
}

/// The most steps a grid may have.
pub const MAX_STEPS: usize = 100_000_000;

/// An observation this close to a step's end, relative to the horizon, is at that end.
const COINCIDENCE: f64 = 1e-12;

/// Why a list of times makes no grid.
#[derive(Clone, Debug, PartialEq)]
pub enum GridError {
    /// No time was given.
    Empty,
    /// A time is negative or not finite.
    BadTime(f64),
    /// A time is not later than the one before it.
    NotIncreasing {
        /// The earlier entry.
        before: f64,
        /// The entry that should be later.
        time: f64,
    },
    /// The number of steps is 0 or above [`MAX_STEPS`].
    BadStepCount(usize),
}

impl fmt::Display for GridError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            GridError::Empty => f.write_str("there is no observation time: give at least one"),
            GridError::BadTime(time) => write!(
                f,
                "{time} is no observation time: times are finite and not negative"
            ),
            GridError::NotIncreasing { before, time } => write!(
                f,
                "observation time {time} follows {before}: give the times in increasing order, each once"
            ),
            GridError::BadStepCount(count) => write!(
                f,
                "{count} steps: the number of steps lies between 1 and {MAX_STEPS}"
            ),
        }
    }
}

impl std::error::Error for GridError {}

/// A node of the grid: its time, and its index if it is one of the equal steps' ends.
#[derive(Clone, Copy)]
struct Node {
    time: f64,
    regular: Option<usize>,
}

impl Grid {
    /// A grid that observes at `times` (increasing; 0 is allowed). With `steps_per_horizon`
    /// the span from 0 to the last time is cut into that many equal steps, which land on each
    /// observation besides; without it, steps go from observation to observation.
    ///
    /// # Errors
    /// See [`GridError`].
    ///
    /// ```
    /// use driftwright_runtime::Grid;
    /// let grid = Grid::new(&[0.25, 0.6, 1.0], Some(4)).unwrap();
    /// assert_eq!(grid.steps().len(), 5);                      // 0.6 splits the third step
    /// assert_eq!(grid.observations()[0].steps_before, 1);
    /// assert_eq!(grid.observations()[1].steps_before, 3);
    /// ```
    pub fn new(times: &[f64], steps_per_horizon: Option<usize>) -> Result<Grid, GridError> {
        let horizon = check_times(times)?;
        let count = steps_per_horizon.unwrap_or(1);
        if count == 0 || count > MAX_STEPS {
            return Err(GridError::BadStepCount(count));
        }
        let mut nodes = vec![Node {
            time: 0.0,
            regular: Some(0),
        }];
        let mut observations = Vec::with_capacity(times.len());
        let mut next = 1;
        for &time in times {
            next = advance(&mut nodes, time, horizon, steps_per_horizon, next);
            observations.push(Observation {
                time,
                steps_before: nodes.len() - 1,
            });
        }
        let equal = horizon / count as f64;
        let steps = nodes.windows(2).map(|pair| Step {
            start: pair[0].time,
            length: match (pair[0].regular, pair[1].regular) {
                (Some(a), Some(b)) if b == a + 1 => equal,
                _ => pair[1].time - pair[0].time,
            },
        });
        Ok(Grid {
            steps: steps.collect(),
            observations,
        })
    }

    /// The steps, in order; their index addresses the random numbers.
    #[must_use]
    pub fn steps(&self) -> &[Step] {
        &self.steps
    }

    /// The observations, in order.
    #[must_use]
    pub fn observations(&self) -> &[Observation] {
        &self.observations
    }

    /// The observation times, in order.
    #[must_use]
    pub fn times(&self) -> Vec<f64> {
        self.observations.iter().map(|o| o.time).collect()
    }

    /// The same grid with every step cut into two halves: halves `2 k` and `2 k + 1` make up step `k`.
    ///
    /// ```
    /// use driftwright_runtime::Grid;
    /// let halved = Grid::new(&[1.0], Some(2)).unwrap().halved();
    /// assert_eq!(halved.steps().len(), 4);
    /// assert_eq!(halved.steps()[3].start, 0.75);
    /// assert_eq!(halved.observations()[0].steps_before, 4);
    /// ```
    #[must_use]
    pub fn halved(&self) -> Grid {
        let halves = |step: &Step| {
            let length = 0.5 * step.length;
            let start = step.start + length;
            [Step { length, ..*step }, Step { start, length }]
        };
        let later = |o: &Observation| Observation {
            steps_before: 2 * o.steps_before,
            ..*o
        };
        Grid {
            steps: self.steps.iter().flat_map(halves).collect(),
            observations: self.observations.iter().map(later).collect(),
        }
    }

    /// The last observation time.
    #[must_use]
    pub fn horizon(&self) -> f64 {
        self.observations.last().map_or(0.0, |o| o.time)
    }
}

/// Checks the times and returns the last.
fn check_times(times: &[f64]) -> Result<f64, GridError> {
    if let Some(&bad) = times.iter().find(|t| !t.is_finite() || **t < 0.0) {
        return Err(GridError::BadTime(bad));
    }
    if let Some(pair) = times.windows(2).find(|pair| pair[1] <= pair[0]) {
        let (before, time) = (pair[0], pair[1]);
        return Err(GridError::NotIncreasing { before, time });
    }
    times.last().copied().ok_or(GridError::Empty)
}

/// Adds the nodes up to and including an observation. `next` is the index of the first
/// regular node not yet placed; returns its new value.
fn advance(
    nodes: &mut Vec<Node>,
    time: f64,
    horizon: f64,
    count: Option<usize>,
    mut next: usize,
) -> usize {
    let close = COINCIDENCE * horizon;
    if let Some(count) = count.filter(|_| horizon > 0.0) {
        while next <= count && regular_time(next, count, horizon) < time - close {
            nodes.push(Node {
                time: regular_time(next, count, horizon),
                regular: Some(next),
            });
            next += 1;
        }
        if next <= count && regular_time(next, count, horizon) <= time + close {
            nodes.push(Node {
                time,
                regular: Some(next),
            });
            return next + 1;
        }
    }
    let last = nodes.last().map_or(0.0, |node| node.time);
    if time > last + close {
        nodes.push(Node {
            time,
            regular: None,
        });
    }
    next
}

/// The end of regular step `index` of `count`.
fn regular_time(index: usize, count: usize, horizon: f64) -> f64 {
    horizon * (index as f64 / count as f64)
}
