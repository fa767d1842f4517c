//! Time of the compiler's passes against the size of what they make: models of several families that grow,
//! in a table with fitted exponents, and a chart (`compile_time.svg` under `target/tmp`).
//!
//! The size of a pass is the model's text and what the pass writes of it, in bytes. A pass that takes
//! time in proportion to `n log n` has exponent 1. `cargo bench --bench compile_time`

mod chart;
mod families;
#[path = "../../../compiler/tests/large/mod.rs"]
mod large;
mod measure;

use std::path::Path;

use families::Family;
use measure::{Measured, PASSES, Sizes, exponent};

/// An exponent up to this is within what medians on a busy machine scatter.
const WITHIN_NOISE: f64 = 1.1;

fn main() {
    let mut panels = Vec::new();
    for family in families::all() {
        let rows: Vec<Measured> = family.sizes.iter().map(|&n| measured(&family, n)).collect();
        print_table(&family, &rows);
        panels.push((family.name, rows));
    }
    let path = Path::new(env!("CARGO_TARGET_TMPDIR")).join("compile_time.svg");
    match std::fs::write(&path, chart::svg(&panels)) {
        Ok(()) => println!("\nDrawn in {}", path.display()),
        Err(error) => println!("\n{} cannot be written: {error}", path.display()),
    }
}

fn measured(family: &Family, count: usize) -> Measured {
    Measured::of(count, &(family.models)(count))
}

fn print_table(family: &Family, rows: &[Measured]) {
    println!("\n{}, {}", family.name, family.unit);
    println!(
        "{:>8}{:>11}{:>12}{:>12}{:>12}   {:>8}{:>9}{:>10}   ns per n ln n",
        "", "model kB", "json kB", "dossier kB", "Rust kB", "check", "derive", "generate"
    );
    for row in rows {
        let Sizes {
            model,
            json,
            dossier,
            rust,
        } = row.sizes;
        let kilobytes = [model, json, dossier, rust].map(|bytes| bytes as f64 / 1e3);
        let [check, derive, generate] = PASSES.map(|pass| row.seconds(pass) * 1e3);
        let ratios = PASSES.map(|pass| format!("{:.1}", row.per_size(pass) * 1e9));
        println!(
            "{:>8}{:>11.1}{:>12.1}{:>12.1}{:>12.1}   {check:>5.0} ms{derive:>6.0} ms{generate:>7.0} ms   {}",
            row.count,
            kilobytes[0],
            kilobytes[1],
            kilobytes[2],
            kilobytes[3],
            ratios.join("  ")
        );
    }
    for pass in PASSES {
        let exponent = exponent(rows, pass);
        let verdict = if exponent > WITHIN_NOISE {
            "ABOVE n log n"
        } else {
            "within n log n"
        };
        println!(
            "{:>8} takes (n log n)^{exponent:.2}: {verdict}",
            pass.name()
        );
    }
}
