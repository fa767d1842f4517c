//! Work against the size of a model, counted in formulas and term operations, which are the same on
//! every machine: growth is at most that of n log n, n the size of the output.

mod large;

use driftwright::diagnostic::Code;
use driftwright::pipeline::{Compiled, compile};
use driftwright::source::SourceFile;

fn compiled(text: &str) -> Compiled {
    let compilation = compile(&SourceFile::new("scale.toml", text));
    assert!(!compilation.has_errors());
    compilation.compiled.expect("a model without errors")
}

fn work(text: &str) -> (usize, u64) {
    let compiled = compiled(text);
    let pool = &compiled.model.pool;
    (pool.node_count(), pool.operations())
}

/// Holds a model four times as large to little more than four times the work.
fn assert_in_proportion(small: &str, large: &str) {
    let (small, large) = (work(small), work(large));
    assert!(large.0 < 5 * small.0, "{small:?} to {large:?} formulas");
    assert!(large.1 < 5 * small.1, "{small:?} to {large:?} operations");
}

#[test]
fn correlated_states_take_formulas_in_proportion() {
    // The correlation matrix, which is part of the output, has 16 times the entries but one value, so
    // that formulas and operations grow with the states.
    assert_in_proportion(&large::correlated(10), &large::correlated(40));
}

#[test]
fn a_step_of_correlated_states_takes_operations_in_proportion() {
    let values = |count| compiled(&large::correlated(count)).program.values.len();
    let (small, large) = (values(40), values(160));
    assert!(large < 5 * small, "{small} to {large} operations");
}

#[test]
fn a_program_of_millions_of_operations_is_an_error() {
    let cascade = |count| compile(&SourceFile::new("cascade.toml", large::cascade(count)));
    assert!(!cascade(100).has_errors());
    let compilation = cascade(1_000);
    let codes: Vec<Code> = compilation.diagnostics.iter().map(|d| d.code).collect();
    assert_eq!(codes, [Code::ProgramTooLarge]);
    let finding = &compilation.diagnostics[0];
    assert_eq!(finding.message, "a step takes more than 2000000 operations");
    assert!(compilation.compiled.is_none());
}

#[test]
fn a_power_of_a_sum_is_kept() {
    assert_in_proportion(&large::power_of_sum(50), &large::power_of_sum(200));
    let compiled = compiled(&large::power_of_sum(200));
    let power = compiled
        .model
        .pool
        .format(compiled.dynamics.derived[0].formula);
    assert_eq!(power, "(a + b + X + 1)^200");
}

#[test]
fn many_models_do_not_grow_on_one_another() {
    let before = work(&large::small(7));
    (0..200).for_each(|n| {
        work(&large::small(n));
    });
    assert_eq!(work(&large::small(7)), before);
}

#[test]
fn a_long_sum_takes_work_in_proportion() {
    assert_in_proportion(&large::long_drift(100), &large::long_drift(400));
    assert_in_proportion(&large::long_drift(1_000), &large::long_drift(4_000));
}

#[test]
fn nested_functions_take_work_in_proportion() {
    let chain = |length| large::chain(length, "sin(D) + X");
    assert_in_proportion(&chain(60), &chain(240));
}

#[test]
fn what_a_long_drift_leaves_undone_is_among_the_reasons() {
    let compiled = compiled(&large::long_drift(1_000));
    let reasons = compiled.plan.groups[0].reasons.join("\n");
    for pass in ["simplification: ", "behaviour at ends: "] {
        let said = format!("A budget was exceeded: {pass}");
        assert!(reasons.contains(&said), "{pass} is not in {reasons}");
    }
}
