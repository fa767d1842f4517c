//! A general-purpose computer algebra system, SymPy, as a judge from outside: thousands of random
//! formulas and models, their derivatives, shapes, proofs, refutations and Ito expansions.
//!
//! Not in the gate, since it needs Python 3 with `sympy` and `mpmath` (`PYTHON` names another
//! interpreter) and some minutes: `cargo test -p driftwright-tests --test oracle -- --ignored`.

mod formulas;
mod tasks;

use std::collections::BTreeMap;
use std::io::Write;
use std::process::{Command, Stdio};

use serde_json::Value;

/// What the oracle says of a list of tasks.
struct Verdicts {
    /// Tasks it does not agree with, and why.
    differing: Vec<String>,
    /// Tasks it agrees with.
    agreeing: Vec<Value>,
}

/// Asks the oracle, in as many processes as there are cores.
fn judged(tasks: &[Value]) -> Verdicts {
    let cores = std::thread::available_parallelism().map_or(1, usize::from);
    let share = tasks.len().div_ceil(cores).max(1);
    let answers: Vec<Value> = std::thread::scope(|scope| {
        let workers: Vec<_> = tasks
            .chunks(share)
            .map(|part| scope.spawn(|| ask(part)))
            .collect();
        let results = workers.into_iter().map(|w| w.join().expect("an answer"));
        results.flatten().collect()
    });
    assert_eq!(answers.len(), tasks.len(), "an answer for each task");
    let mut counts = BTreeMap::<String, usize>::new();
    let (mut differing, mut agreeing) = (Vec::new(), Vec::new());
    for (task, answer) in tasks.iter().zip(&answers) {
        let verdict = answer["verdict"].as_str().expect("a verdict").to_owned();
        if verdict == "differ" {
            differing.push(format!("{task}\n    {}", answer["notes"]));
        }
        if verdict == "agree" {
            agreeing.push(task.clone());
        }
        *counts.entry(verdict).or_default() += 1;
    }
    println!("{counts:?}");
    Verdicts {
        differing,
        agreeing,
    }
}

fn ask(tasks: &[Value]) -> Vec<Value> {
    let script = concat!(env!("CARGO_MANIFEST_DIR"), "/oracle/sympy_oracle.py");
    let python = std::env::var("PYTHON").unwrap_or_else(|_| "python3".into());
    let mut child = Command::new(&python)
        .arg(script)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .spawn()
        .unwrap_or_else(|e| panic!("{python}: {e}"));
    let mut input = child.stdin.take().expect("a pipe");
    let text: String = tasks.iter().map(|task| format!("{task}\n")).collect();
    let writer = std::thread::spawn(move || input.write_all(text.as_bytes()));
    let output = child.wait_with_output().expect("the oracle ends");
    writer.join().expect("no panic").expect("the oracle reads");
    assert!(output.status.success(), "the oracle failed: it needs sympy");
    let answers = String::from_utf8(output.stdout).expect("text");
    answers
        .lines()
        .map(|line| serde_json::from_str(line).expect("an answer"))
        .collect()
}

/// All agree, and few had no point at which to compare.
fn assert_agreed(tasks: &[Value]) {
    let verdicts = judged(tasks);
    let differing = &verdicts.differing;
    assert!(
        differing.is_empty(),
        "{} of {} differ:\n{}",
        differing.len(),
        tasks.len(),
        differing.join("\n")
    );
    let agreed = verdicts.agreeing.len();
    assert!(
        agreed * 10 >= tasks.len() * 8,
        "only {agreed} of {} could be compared",
        tasks.len()
    );
}

#[test]
#[ignore = "needs Python with sympy; cargo test -p driftwright-tests --test oracle -- --ignored"]
fn derivatives_agree() {
    assert_agreed(&tasks::derivatives(1, 1500));
}

#[test]
#[ignore = "needs Python with sympy; cargo test -p driftwright-tests --test oracle -- --ignored"]
fn simplified_and_expanded_formulas_agree() {
    assert_agreed(&tasks::shapes(2, 1500));
}

#[test]
#[ignore = "needs Python with sympy; cargo test -p driftwright-tests --test oracle -- --ignored"]
fn proofs_and_refutations_agree() {
    let tasks = tasks::equations(3, 2000);
    let of_kind = |kind: &str| tasks.iter().filter(|task| task["kind"] == kind).count();
    println!("{} proved, {} refuted", of_kind("same"), of_kind("witness"));
    assert!(of_kind("same") >= 500 && of_kind("witness") >= 500);
    assert_agreed(&tasks);
}

#[test]
#[ignore = "needs Python with sympy; cargo test -p driftwright-tests --test oracle -- --ignored"]
fn itos_rule_agrees_in_one_state() {
    assert_agreed(&tasks::expansions(4, 500, 1));
}

#[test]
#[ignore = "needs Python with sympy; cargo test -p driftwright-tests --test oracle -- --ignored"]
fn itos_rule_agrees_in_two_states() {
    assert_agreed(&tasks::expansions(5, 500, 2));
}

/// The twins: a wrong derivative and a lost correction do not go unnoticed.
#[test]
#[ignore = "needs Python with sympy; cargo test -p driftwright-tests --test oracle -- --ignored"]
fn slips_are_reported() {
    let mut slips = Vec::new();
    for mut task in tasks::expansions(6, 100, 1) {
        // `mu` for the drift of log(S), where it is `mu - sigma^2/2`.
        if task["correction"] != "0" {
            task["drift"] = task["chain_rule"].clone();
            slips.push(task);
        }
    }
    for mut task in tasks::derivatives(7, 50) {
        let result = task["result"].as_str().expect("a formula");
        if result != "0" {
            task["result"] = format!("1.000000001*({result})").into();
            slips.push(task);
        }
    }
    assert!(slips.len() >= 60, "{}", slips.len());
    let verdicts = judged(&slips);
    let agreeing: Vec<String> = verdicts.agreeing.iter().map(Value::to_string).collect();
    assert!(
        agreeing.is_empty(),
        "slips agreed:\n{}",
        agreeing.join("\n")
    );
    assert!(verdicts.differing.len() * 10 >= slips.len() * 8);
}
