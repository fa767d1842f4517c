//! What agreement means: the same errors at construction, the same bits on every path.

use std::collections::BTreeMap;
use std::path::Path;

use driftwright::back::interpret::Interpreter;
use driftwright::program::Program;
use driftwright_runtime::collect::Paths;
use driftwright_runtime::{
    ArithmeticClass, Failures, Grid, ParameterError, Run, Simulator, simulate,
};

type Values = BTreeMap<String, f64>;

/// Parameter sets tried for a model, the model's own among them.
const SETS: u64 = 6;

/// Constructs the built and the expanded simulator and the interpreter from the same values and compares
/// them.
pub(crate) fn model<B: Simulator, E: Simulator>(
    path: &str,
    built: impl Fn(&Values) -> Result<B, ParameterError>,
    expanded: impl Fn(&Values) -> Result<E, ParameterError>,
) {
    let program = driftwright::build::model(Path::new(path), path)
        .expect("the model compiles")
        .program;
    let mut accepted = 0;
    for set in 0..SETS {
        let values = parameters(&program, set);
        let results = (
            Interpreter::new(&program, &values),
            built(&values),
            expanded(&values),
        );
        match results {
            (Ok(interpreter), Ok(built), Ok(expanded)) => {
                accepted += 1;
                assert_eq!(interpreter.facts(), built.facts(), "{path}, {values:?}");
                assert_eq!(built.facts(), expanded.facts(), "{path}, {values:?}");
                same_paths(path, set, &interpreter, &built, &expanded);
                let states = program.slots.len() - usize::from(program.left_domain.is_some());
                let laws = laws(&interpreter, states);
                assert_eq!(laws.is_empty(), program.laws.is_empty(), "{path}");
                assert_eq!(laws, self::laws(&built, states), "{path}, {values:?}");
                assert_eq!(laws, self::laws(&expanded, states), "{path}, {values:?}");
            }
            (Err(first), Err(second), Err(third)) => {
                assert_eq!(first.to_string(), second.to_string(), "{path}, {values:?}");
                assert_eq!(first.to_string(), third.to_string(), "{path}, {values:?}");
            }
            _ => panic!("{path}: one accepts {values:?}, another does not"),
        }
    }
    assert!(
        accepted >= 2,
        "{path}: only {accepted} parameter sets were accepted"
    );
    for name in program.parameters.iter().map(|p| &p.name) {
        let mut values = parameters(&program, 0);
        values.insert(name.clone(), f64::NAN);
        let refused = Interpreter::new(&program, &values)
            .expect_err("NaN is no parameter")
            .to_string();
        assert_eq!(
            Some(refused.clone()),
            built(&values).err().map(|e| e.to_string())
        );
        assert_eq!(
            Some(refused),
            expanded(&values).err().map(|e| e.to_string())
        );
    }
}

fn same_paths(
    path: &str,
    set: u64,
    interpreter: &Interpreter,
    built: &impl Simulator,
    expanded: &impl Simulator,
) {
    for class in [ArithmeticClass::Fused, ArithmeticClass::Unfused] {
        for seed in [1, 20_260_101 + set] {
            let reference = bits(interpreter, class, seed);
            assert!(
                reference == bits(built, class, seed),
                "{path} {class} {seed}: built code differs"
            );
            assert!(
                reference == bits(expanded, class, seed),
                "{path} {class} {seed}: the macro's differs"
            );
        }
    }
}

/// Mean, variance, distribution function and density of each state that has a law by itself, as bits: given the value
/// of one path, at the value of another.
fn laws(simulator: &impl Simulator, states: usize) -> Vec<[u64; 4]> {
    let grid = Grid::new(&[0.3], Some(3)).expect("the grid is sound");
    let run = Run {
        paths: 2,
        ..Run::default()
    };
    let values = simulate(simulator, &grid, &run, Paths)
        .expect("the run succeeds")
        .output
        .values;
    let outputs = values.len() / 2;
    let law = |state: usize| {
        let law = simulator.law(state, values[state], 0.3, 0.7)?;
        let at = values[outputs + state];
        let numbers = [law.mean(), law.variance(), law.cdf(at), law.density(at)];
        Some(numbers.map(|n| if n.is_nan() { u64::MAX } else { n.to_bits() }))
    };
    (0..states).filter_map(law).collect()
}

/// All observed values of 300 paths (a block and a part of one) as bits, any NaN as one, and the
/// failures.
fn bits(
    simulator: &impl Simulator,
    arithmetic: ArithmeticClass,
    seed: u64,
) -> (Vec<u64>, Failures) {
    let grid = Grid::new(&[0.0, 0.3, 1.0, 2.5], Some(11)).expect("the grid is sound");
    let run = Run {
        paths: 300,
        first_path: 200,
        seed,
        arithmetic,
        threads: 1,
        ..Run::default()
    };
    let outcome = simulate(simulator, &grid, &run, Paths).expect("the run succeeds");
    assert_eq!(
        outcome.arithmetic, arithmetic,
        "this processor lacks the multiply-add"
    );
    let bits = |value: &f64| {
        if value.is_nan() {
            u64::MAX
        } else {
            value.to_bits()
        }
    };
    (
        outcome.output.values.iter().map(bits).collect(),
        outcome.failures,
    )
}

/// The model's own values (1 where it has none) for set 0, else each moved by up to 30 %.
fn parameters(program: &Program, set: u64) -> Values {
    let mut random = set;
    let mut factor = || {
        // The SplitMix64 generator (Steele, Lea, Flood 2014).
        random = random.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut word = random;
        word = (word ^ (word >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        word = (word ^ (word >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        let unit = ((word ^ (word >> 31)) >> 11) as f64 / (1_u64 << 53) as f64;
        if set == 0 { 1.0 } else { 0.7 + 0.6 * unit }
    };
    let value = |(place, parameter): (usize, &driftwright::program::Parameter)| {
        // Models without own values assume an order among them at most: spread them out.
        let own = parameter.value.unwrap_or(2.0 / (1.0 + place as f64));
        (parameter.name.clone(), own * factor())
    };
    program.parameters.iter().enumerate().map(value).collect()
}
