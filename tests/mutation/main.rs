//! Mutation testing of the calculus and the algebra: would the tests notice a wrong operator?
//!
//! A copy of the compiler is made in which 300 places, drawn from a fixed seed, each hold two versions of
//! an expression: the written one and a wrong one, chosen by an environment variable when the tests
//! start. So the copy is built once and its tests run 300 times (mutant schemata: Untch, Offutt and
//! Harrold 1993). A mutant is caught when a test fails, panics or does not end.
//!
//! No mutants are made of what is neither right nor wrong: constants (budgets, precisions, sampling
//! points), tables of amounts and the published generator of random numbers, the arguments of functions
//! that reserve memory or work, and whether a comparison with a budget is strict. All else is drawn,
//! guards of patterns too.
//!
//! `judged.txt` names survivors that were looked at and do the same as the written version, or differ
//! in speed or in how far a search goes before it gives up; each with its reason. Nine of ten of the
//! others must be caught. An entry that fits no place any more fails the run.
//!
//! Takes a while, so it stands apart:
//! `cargo test -p driftwright-tests --test mutation -- --ignored --nocapture`.
//! `DRIFTWRIGHT_MUTATION_SEED` draws other places, `DRIFTWRIGHT_MUTANTS` another number of them.

mod judged;
mod mutate;
mod workspace;
mod wrong;

use std::collections::{BTreeMap, BTreeSet};
use std::sync::Mutex;

use driftwright_tests::harness::values::repository;
use mutate::{Chosen, Site, sites};
use workspace::{Built, Copy};

/// What is mutated, below `compiler/src`.
const MUTATED: [&str; 2] = ["calculus", "symbolic"];

#[test]
#[ignore = "takes a while; see the head of the file"]
fn nine_of_ten_mutants_are_caught() {
    let number = |name: &str, default: u64| {
        std::env::var(name).map_or(default, |v| v.parse().expect("a number"))
    };
    let (seed, count) = (
        number("DRIFTWRIGHT_MUTATION_SEED", 1),
        number("DRIFTWRIGHT_MUTANTS", 300) as usize,
    );
    let all = sites(&repository(), &MUTATED);
    let judged = judged::reasons(&all);
    println!(
        "{} places in {}, {} of them judged",
        all.len(),
        MUTATED.join(" and "),
        judged.len()
    );
    let copy = Copy::of(&repository());
    let (built, chosen) = build(&copy, &all, seed, count);
    built.assert_sound();
    let survivors = run(&built, &all, &chosen, &judged);
    let (known, open): (Vec<usize>, Vec<usize>) = survivors
        .into_iter()
        .partition(|site| judged.contains_key(site));
    let tried = chosen.len() - known.len();
    println!(
        "{} drawn, {} judged without effect, {} of {tried} others caught; open:",
        chosen.len(),
        known.len(),
        tried - open.len()
    );
    for site in &open {
        println!("  {} in `{}`", all[*site], all[*site].text);
    }
    assert!(open.len() * 10 <= tried, "{} survived", open.len());
}

/// Runs the mutants, as many at a time as there are processors; those that survive.
fn run(
    built: &Built,
    all: &[Site],
    chosen: &[usize],
    judged: &BTreeMap<usize, &str>,
) -> BTreeSet<usize> {
    let pending = Mutex::new(chosen.iter().copied().enumerate());
    let survivors = Mutex::new(BTreeSet::new());
    let workers = std::thread::available_parallelism().map_or(1, usize::from);
    let work = || {
        loop {
            let next = pending.lock().expect("no worker panics").next();
            let Some((number, site)) = next else { return };
            let caught = built.is_caught(number);
            let word = match judged.get(&site) {
                _ if caught => "caught".to_owned(),
                Some(reason) => format!("judged ({reason})"),
                None => "SURVIVED".to_owned(),
            };
            println!("{number:>4} {word} {}", all[site]);
            if !caught {
                survivors.lock().expect("no worker panics").insert(site);
            }
        }
    };
    std::thread::scope(|scope| {
        (0..workers).for_each(|_| {
            scope.spawn(work);
        });
    });
    survivors.into_inner().expect("no worker panics")
}

/// Draws places and builds the copy; places whose wrong version has no type are drawn anew.
fn build(copy: &Copy, all: &[Site], seed: u64, count: usize) -> (Built, Vec<usize>) {
    let order = shuffled(all.len(), seed);
    let mut refused = BTreeSet::new();
    loop {
        let drawn = order.iter().copied().filter(|site| !refused.contains(site));
        let chosen: Vec<usize> = drawn.take(count).collect();
        copy.write(&MUTATED, &Chosen::new(&chosen));
        match copy.build() {
            Ok(built) => return (built, chosen),
            Err(numbers) => refused.extend(numbers.into_iter().map(|n| chosen[n])),
        }
        println!(
            "{} places have no wrong version that compiles",
            refused.len()
        );
    }
}

/// The numbers below `count` in an order drawn from a seed (Fisher-Yates, with a splitmix64 stream).
fn shuffled(count: usize, seed: u64) -> Vec<usize> {
    let mut state = seed;
    let mut draw = || {
        state = state.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = state;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    };
    let mut order: Vec<usize> = (0..count).collect();
    for i in (1..count).rev() {
        order.swap(i, (draw() % (i as u64 + 1)) as usize);
    }
    order
}
