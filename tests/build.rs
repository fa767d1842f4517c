//! Compiles the shipped models and the fixtures to Rust, and lists them for the tests that look at all.

use std::fmt::Write as _;
use std::path::{Path, PathBuf};

use driftwright::back::rust;

/// Folders of models, from the package's root.
const FOLDERS: [&str; 2] = ["../models", "fixtures/models"];

fn main() {
    let paths: Vec<PathBuf> = FOLDERS.into_iter().flat_map(models_in).collect();
    for folder in FOLDERS {
        // A new file in a folder is a new input.
        println!("cargo::rerun-if-changed={folder}");
    }
    let mut list = String::from("every_model! {\n");
    for (path, program) in paths.iter().zip(driftwright::build::models(&paths)) {
        let simulator = rust::simulator_type(&program);
        let name = if program.name == "type" {
            "r#type"
        } else {
            &program.name
        };
        let file = format!("/{}.rs", program.name);
        writeln!(
            list,
            "{name} {simulator} {:?} {file:?} {{",
            path.display().to_string()
        )
        .expect("a string takes all text");
        for (parameter, field) in program
            .parameters
            .iter()
            .zip(rust::parameter_fields(&program))
        {
            writeln!(list, "{:?} {field},", parameter.name).expect("a string takes all text");
        }
        list.push_str("}\n");
    }
    list.push_str("}\n");
    let directory = std::env::var_os("OUT_DIR").expect("Cargo sets OUT_DIR for build scripts");
    std::fs::write(Path::new(&directory).join("every_model.rs"), list)
        .expect("OUT_DIR is writable");
}

/// The model files of a folder, by name.
fn models_in(folder: &str) -> Vec<PathBuf> {
    let entries = std::fs::read_dir(folder).unwrap_or_else(|error| panic!("{folder}: {error}"));
    let paths = entries.map(|entry| entry.expect("the folder can be listed").path());
    let mut models: Vec<PathBuf> = paths
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    models.sort();
    models
}
