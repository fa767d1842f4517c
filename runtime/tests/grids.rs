//! Time grids.

use driftwright_runtime::{Grid, GridError};

/// Lists of times that make no grid: each is an error of its own.
#[test]
fn impossible_grids() {
    let refused = |times: &[f64], steps| Grid::new(times, steps).unwrap_err();
    assert_eq!(refused(&[], None), GridError::Empty);
    assert_eq!(refused(&[-1.0], None), GridError::BadTime(-1.0));
    assert!(matches!(refused(&[f64::NAN], None), GridError::BadTime(_)));
    let back = GridError::NotIncreasing {
        before: 2.0,
        time: 1.0,
    };
    assert_eq!(refused(&[2.0, 1.0], None), back);
    assert_eq!(refused(&[1.0], Some(0)), GridError::BadStepCount(0));
    assert_eq!(
        refused(&[1.0], Some(usize::MAX)),
        GridError::BadStepCount(usize::MAX)
    );
}

/// Grids land on every observation and make equal steps equal to the last bit.
#[test]
fn grids_land_on_observations() {
    let grid = Grid::new(&[0.1, 0.2, 0.3, 1.0], Some(10)).expect("a grid");
    assert_eq!(grid.steps().len(), 10);
    assert!(grid.steps().iter().all(|step| step.length == 0.1));
    let before: Vec<usize> = grid.observations().iter().map(|o| o.steps_before).collect();
    assert_eq!(before, [1, 2, 3, 10]);
    let odd = Grid::new(&[0.0, 0.15, 1.0], Some(10)).expect("a grid");
    assert_eq!(odd.steps().len(), 11);
    let length: f64 = odd.steps().iter().map(|step| step.length).sum();
    assert!((length - 1.0).abs() < 1e-15);
    let bare = Grid::new(&[0.0, 0.5, 2.0], None).expect("a grid");
    let lengths: Vec<f64> = bare.steps().iter().map(|step| step.length).collect();
    assert_eq!(lengths, [0.5, 1.5]);
    assert!(
        Grid::new(&[0.0], Some(3))
            .expect("a grid")
            .steps()
            .is_empty()
    );
}
