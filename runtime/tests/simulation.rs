//! The driver: paths are pure functions of their address.

use std::sync::Mutex;

use driftwright_runtime::collect::{Moments, Paths, Summary};
use driftwright_runtime::random::{Address, normal_pair};
use driftwright_runtime::{
    Arith, ArithmeticClass, Failures, Fused, Generator, Grid, InstructionSet, Outcome, Progress,
    Run, RunError, Unfused, math, simulate, source_id,
};

use crate::fragile::Fragile;
use crate::models::{Geometric, ORCHARD};

const SETS: [InstructionSet; 3] = [
    InstructionSet::Baseline,
    InstructionSet::Avx2,
    InstructionSet::Avx512,
];

fn grid() -> Grid {
    Grid::new(&[0.0, 0.25, 0.6, 1.0], Some(7)).expect("a grid")
}

fn run(paths: u64) -> Run<'static> {
    Run {
        paths,
        seed: 11,
        ..Run::default()
    }
}

/// The bits of all observed values.
fn bits(run: &Run<'_>) -> Vec<u64> {
    let outcome = simulate(&ORCHARD, &grid(), run, Paths).expect("a run");
    outcome
        .output
        .values
        .into_iter()
        .map(f64::to_bits)
        .collect()
}

/// The path of geometric Brownian motion written down once more, for one path at a time.
fn one_path<A: Arith>(generator: Generator, path: u64) -> Vec<f64> {
    let grid = grid();
    let Geometric { start, mu, sigma } = ORCHARD;
    let mut log = start.ln();
    let mut values = Vec::new();
    let mut done = 0;
    for observation in grid.observations() {
        for (index, step) in grid
            .steps()
            .iter()
            .enumerate()
            .take(observation.steps_before)
            .skip(done)
        {
            let address = Address {
                seed: 11,
                source: source_id("W"),
                block: index as u64 / 2,
                attempt: 0,
            };
            let z = normal_pair::<A>(generator.words(&address, path))[index % 2];
            let drift = (mu - 0.5 * sigma * sigma) * step.length;
            log = A::mul_add(sigma * step.length.sqrt(), z, log + drift);
        }
        done = observation.steps_before;
        values.extend([math::exp::<A>(log), log]);
    }
    values
}

/// Each path of a block equals the path computed alone, straight from its address.
#[test]
fn lanes_equal_single_paths() {
    for generator in [Generator::Threefry2x64, Generator::Philox4x32] {
        for arithmetic in [ArithmeticClass::Fused, ArithmeticClass::Unfused] {
            let settings = Run {
                generator,
                arithmetic,
                first_path: 300,
                ..run(500)
            };
            let outcome = simulate(&ORCHARD, &grid(), &settings, Paths).expect("a run");
            let single = match outcome.arithmetic {
                ArithmeticClass::Fused => one_path::<Fused>,
                ArithmeticClass::Unfused => one_path::<Unfused>,
            };
            let expected: Vec<f64> = (300..800)
                .flat_map(|path| single(generator, path))
                .collect();
            assert_eq!(outcome.output.values, expected);
        }
    }
}

/// Within a class all instruction sets give the same bits; the classes differ.
#[test]
fn instruction_sets_agree() {
    let of = |set: InstructionSet, arithmetic| {
        bits(&Run {
            instruction_set: Some(set),
            arithmetic,
            ..run(600)
        })
    };
    let available = || SETS.into_iter().filter(|set| set.is_available());
    let unfused = of(InstructionSet::Baseline, ArithmeticClass::Unfused);
    for set in available() {
        assert_eq!(of(set, ArithmeticClass::Unfused), unfused, "{set:?}");
    }
    let fused: Vec<_> = available().filter(|set| set.has_fused()).collect();
    for &set in &fused {
        assert_eq!(
            of(set, ArithmeticClass::Fused),
            of(fused[0], ArithmeticClass::Fused),
            "{set:?}"
        );
        assert_ne!(of(set, ArithmeticClass::Fused), unfused, "{set:?}");
    }
}

/// Without the instruction the fused class becomes the unfused one, and the outcome says so.
#[test]
fn fused_falls_back_where_it_is_no_instruction() {
    let settings = Run {
        instruction_set: Some(InstructionSet::Baseline),
        ..run(10)
    };
    let outcome = simulate(&ORCHARD, &grid(), &settings, Moments).expect("a run");
    let fused = InstructionSet::Baseline.has_fused();
    assert_eq!(outcome.arithmetic == ArithmeticClass::Fused, fused);
}

/// Threads change nothing: neither paths nor statistics, to the last bit.
#[test]
fn threads_do_not_matter() {
    let outcome = |threads| -> Outcome<(Vec<f64>, Vec<Vec<Summary>>)> {
        let settings = Run {
            threads,
            ..run(20_001)
        };
        let Outcome {
            output: (paths, moments),
            failures,
            arithmetic,
        } = simulate(&ORCHARD, &grid(), &settings, (Paths, Moments)).expect("a run");
        Outcome {
            output: (paths.values, moments),
            failures,
            arithmetic,
        }
    };
    let alone = outcome(1).output;
    for threads in [2, 3, 8, 0] {
        assert_eq!(outcome(threads).output, alone, "{threads} threads");
    }
}

/// Any part of a run has the paths of the whole run, whatever blocks it cuts.
#[test]
fn parts_make_up_the_whole() {
    let whole = bits(&run(1000));
    let per_path = whole.len() / 1000;
    for cuts in [
        vec![0, 1000],
        vec![0, 1, 255, 256, 257, 700, 1000],
        vec![0, 512, 1000],
    ] {
        let part = |pair: &[u64]| {
            bits(&Run {
                first_path: pair[0],
                ..run(pair[1] - pair[0])
            })
        };
        let parts: Vec<u64> = cuts.windows(2).flat_map(part).collect();
        assert_eq!(parts, whole, "{cuts:?}");
    }
    let far = bits(&Run {
        first_path: 1 << 40,
        ..run(3)
    });
    assert_eq!(far.len(), 3 * per_path);
    assert_ne!(far, whole[..far.len()]);
}

/// The seed and the generator change every path; an observation more changes none.
#[test]
fn what_a_path_depends_on() {
    let base = bits(&run(100));
    let differ = |other: Vec<u64>| {
        let same = base.chunks(8).zip(other.chunks(8)).filter(|(a, b)| a == b);
        assert_eq!(same.count(), 0);
    };
    differ(bits(&Run {
        seed: 12,
        ..run(100)
    }));
    differ(bits(&Run {
        generator: Generator::Philox4x32,
        ..run(100)
    }));
    let observe = |times: &[f64]| {
        let grid = Grid::new(times, Some(4)).expect("a grid");
        simulate(&ORCHARD, &grid, &run(100), Paths)
            .expect("a run")
            .output
    };
    let (few, many) = (observe(&[1.0]), observe(&[0.25, 0.75, 1.0]));
    for path in 0..100 {
        assert_eq!(few.get(path, 0, 0), many.get(path, 2, 0));
    }
}

/// Failed paths are counted once each, among the paths of the run only.
#[test]
fn failures_are_counted() {
    let grid = Grid::new(&[0.5, 1.0, 2.0], Some(8)).expect("a grid");
    let outcome = simulate(&Fragile, &grid, &run(1000), Paths).expect("a run");
    let mut expected = Failures::default();
    for path in 0..1000 {
        let values = (0..3).map(|time| outcome.output.get(path, time, 0));
        expected.non_finite += u64::from(values.clone().any(|x| !x.is_finite()));
        expected.left_domain += u64::from(outcome.output.get(path, 2, 1) == 1.0);
    }
    assert_eq!(outcome.failures, expected);
    assert!(expected.non_finite > 50 && expected.left_domain > 50);
    assert!(expected.non_finite < 950 && expected.left_domain < 950);
    let part = |first_path, paths| {
        let settings = Run {
            first_path,
            ..run(paths)
        };
        simulate(&Fragile, &grid, &settings, Moments)
            .expect("a run")
            .failures
    };
    let (a, b) = (part(0, 300), part(300, 700));
    assert_eq!(a.non_finite + b.non_finite, expected.non_finite);
    assert_eq!(a.left_domain + b.left_domain, expected.left_domain);
}

/// Runs that cannot be: each is an error that says what to do.
#[test]
fn impossible_runs() {
    let refused = |settings: Run<'_>| simulate(&ORCHARD, &grid(), &settings, Moments).unwrap_err();
    assert!(matches!(refused(run(0)), RunError::BadPathCount(0)));
    let beyond = Run {
        first_path: u64::MAX,
        ..run(2)
    };
    assert!(matches!(refused(beyond), RunError::BadPathCount(2)));
    let far = Grid::new(&[1.0, 64.0], None).expect("a grid");
    let error = simulate(&Fragile, &far, &run(10), Moments).unwrap_err();
    assert!(matches!(error, RunError::Step { time: 1.0, .. }));
    assert!(error.to_string().contains("from time 1"), "{error}");
}

/// Progress hears of every block in order and ends at the total.
#[test]
fn progress_is_told_in_order() {
    struct Log(Mutex<Vec<(u64, u64)>>);
    impl Progress for Log {
        fn advanced(&self, done: u64, total: u64) {
            self.0.lock().expect("no panic").push((done, total));
        }
    }
    let log = Log(Mutex::new(Vec::new()));
    let settings = Run {
        progress: Some(&log),
        threads: 3,
        ..run(600)
    };
    simulate(&ORCHARD, &grid(), &settings, Moments).expect("a run");
    let heard = log.0.into_inner().expect("no panic");
    assert_eq!(heard, [(256, 600), (512, 600), (600, 600)]);
}
