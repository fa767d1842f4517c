//! What a simulator gives, in one line: part of the test and of the crate that it compiles.

use driftwright_runtime::collect::Paths;
use driftwright_runtime::{Grid, ParameterError, Run, Simulator, simulate};

/// The bits of some paths, or why there are none.
pub(crate) fn show<S: Simulator>(simulator: Result<S, ParameterError>) -> String {
    let simulator = match simulator {
        Ok(simulator) => simulator,
        Err(error) => return format!("refused: {error}"),
    };
    let grid = Grid::new(&[0.5, 1.0], Some(3)).expect("a sound grid");
    let run = Run {
        paths: 8,
        seed: 7,
        threads: 1,
        ..Run::default()
    };
    match simulate(&simulator, &grid, &run, Paths) {
        Ok(outcome) => {
            let values = outcome.output.values.iter();
            // Any NaN is as good as another.
            let bits: Vec<String> = values
                .map(|x| match x.is_nan() {
                    true => "nan".to_owned(),
                    false => format!("{:x}", x.to_bits()),
                })
                .collect();
            format!("{:?} {}", outcome.failures, bits.join(" "))
        }
        Err(error) => format!("failed: {error}"),
    }
}
