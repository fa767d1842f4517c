//! Mutation testing of the calculus and the algebra: would the tests notice a wrong operator?
//!
//! A copy of the compiler is made in which 300 places, drawn from a fixed seed, each hold two versions of
//! an expression: the written one and a wrong one, chosen by an environment variable when the tests
//! start. So the copy is built once and its tests run 300 times (mutant schemata: Untch, Offutt and
//! Harrold 1993). A mutant is caught when a test fails, panics or does not end.
//!
//! Takes most of an hour, so it stands apart:
//! `cargo test -p driftwright-tests --test mutation -- --ignored --nocapture`.
//! `DRIFTWRIGHT_MUTATION_SEED` draws other places, `DRIFTWRIGHT_MUTANTS` another number of them.

mod mutate;
mod workspace;

use std::collections::BTreeSet;

use driftwright_tests::harness::values::repository;
use mutate::{Chosen, Site, sites};
use workspace::{Built, Copy};

/// What is mutated, below `compiler/src`.
const MUTATED: [&str; 2] = ["calculus", "symbolic"];

/// Survivors that were looked at, each with the reason why no test can or need tell it apart.
const JUDGED: [(&str, &str); 0] = [];

#[test]
#[ignore = "takes most of an hour; see the head of the file"]
fn nine_of_ten_mutants_are_caught() {
    let number = |name: &str, default: u64| {
        std::env::var(name).map_or(default, |v| v.parse().expect("a number"))
    };
    let (seed, count) = (
        number("DRIFTWRIGHT_MUTATION_SEED", 1),
        number("DRIFTWRIGHT_MUTANTS", 300) as usize,
    );
    let all = sites(&repository(), &MUTATED);
    println!("{} places in {}", all.len(), MUTATED.join(" and "));
    let copy = Copy::of(&repository());
    let (built, chosen) = build(&copy, &all, seed, count);
    built.assert_sound();
    let mut survivors = Vec::new();
    for (number, &site) in chosen.iter().enumerate() {
        let caught = built.is_caught(number);
        println!(
            "{number:>4} {} {}",
            if caught { "caught  " } else { "SURVIVED" },
            all[site]
        );
        if !caught {
            survivors.push(all[site].to_string());
        }
    }
    let judged = |s: &&String| JUDGED.iter().any(|(site, _)| s.as_str() == *site);
    let open: Vec<&String> = survivors.iter().filter(|s| !judged(s)).collect();
    println!(
        "{} of {} caught; survivors without a judgement:",
        chosen.len() - survivors.len(),
        chosen.len()
    );
    open.iter().for_each(|s| println!("  {s}"));
    assert!(
        survivors.len() * 10 <= chosen.len(),
        "{} survived",
        survivors.len()
    );
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
