//! A sample of the random models, compiled: their Rust builds against the runtime without a warning, and
//! steps to the same bits as the interpreter.
//!
//! `cargo test -p driftwright-fuzzing --test compiled -- --ignored`; the environment variable `SAMPLE` is
//! the number of models (24), `CORPUS` a folder other than the one in the repository.

#[path = "../folders/mod.rs"]
mod folders;
mod show;

use std::fmt::Write as _;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

use driftwright::back::interpret::Interpreter;
use driftwright::back::rust;
use driftwright::pipeline::compile;
use driftwright::program::Program;
use driftwright::source::SourceFile;
use driftwright_fuzzing::{generate, run};

/// Models compiled where no number is asked for.
const SAMPLE: usize = 24;

/// Programs of models of the corpus that compile.
fn sample() -> Vec<Program> {
    let wanted = std::env::var("SAMPLE").map_or(SAMPLE, |n| n.parse().expect("a number"));
    let own = || folders::repository().join("tests/fuzz/corpus/structured_model");
    let folder = std::env::var_os("CORPUS").map_or_else(own, PathBuf::from);
    let entries = folders::contents(&folder);
    let programs = entries.iter().filter_map(|(_, bytes)| {
        let text = generate::model(bytes);
        let compilation = compile(&SourceFile::new("model.toml", text));
        let sound = !compilation.has_errors();
        compilation.compiled.filter(|_| sound).map(|c| c.program)
    });
    programs.take(wanted).collect()
}

/// The expression that makes the simulator of a generated module.
fn construction(module: &str, program: &Program) -> String {
    let own = run::values(program);
    let fields = program
        .parameters
        .iter()
        .zip(rust::parameter_fields(program));
    let mut arguments = String::new();
    for (parameter, field) in fields {
        let value = own.get(&parameter.name).copied().or(parameter.value);
        let bits = value.expect("a value for each parameter").to_bits();
        write!(arguments, "{field}: f64::from_bits({bits}), ").expect("a string takes all text");
    }
    let name = match program.name.as_str() {
        "type" => "r#type",
        name => name,
    };
    let path = format!("{module}::{name}");
    let simulator = rust::simulator_type(program);
    format!("{path}::{simulator}::new({path}::Parameters {{ {arguments} }})")
}

/// A crate with the modules of all programs and a `main` that shows what each gives.
fn write_crate(folder: &Path, programs: &[Program]) {
    let source = folder.join("src");
    fs::create_dir_all(&source).expect("a folder for the sources");
    let runtime = folders::repository().join("runtime");
    let manifest = format!(
        "[package]\nname = \"sample\"\nversion = \"0.0.0\"\nedition = \"2024\"\n[workspace]\n\
         [dependencies]\ndriftwright-runtime = {{ path = {:?} }}\n",
        runtime.display().to_string()
    );
    let (mut modules, mut calls) = (String::new(), String::new());
    for (i, program) in programs.iter().enumerate() {
        let text = rust::generate_source(program);
        fs::write(source.join(format!("model_{i}.rs")), text).expect("a file is written");
        writeln!(modules, "mod m{i} {{ include!(\"model_{i}.rs\"); }}").expect("text");
        let made = construction(&format!("m{i}"), program);
        writeln!(calls, "    println!(\"{{}}\", show::show({made}));").expect("text");
    }
    let main = format!("#![deny(warnings)]\nmod show;\n{modules}fn main() {{\n{calls}}}\n");
    let files = [
        (folder.join("Cargo.toml"), manifest.as_str()),
        (source.join("show.rs"), include_str!("show.rs")),
        (source.join("main.rs"), &main),
    ];
    for (path, text) in files {
        fs::write(path, text).expect("a file is written");
    }
}

#[test]
#[ignore = "compiles a crate of generated code, which takes minutes"]
fn a_sample_compiles_and_agrees_with_the_interpreter() {
    let programs = sample();
    assert!(!programs.is_empty(), "no model of the corpus compiles");
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("sample");
    write_crate(&folder, &programs);
    let output = Command::new(env!("CARGO"))
        .args(["run", "--quiet", "--offline"])
        .current_dir(&folder)
        .env("CARGO_TARGET_DIR", folder.join("target"))
        .output()
        .expect("cargo runs");
    let said = String::from_utf8_lossy(&output.stderr);
    assert!(output.status.success(), "{said}");
    let shown = String::from_utf8_lossy(&output.stdout);
    let lines: Vec<&str> = shown.lines().collect();
    assert_eq!(lines.len(), programs.len());
    for (i, (program, line)) in programs.iter().zip(lines).enumerate() {
        let interpreted = show::show(Interpreter::new(program, &run::values(program)));
        assert!(
            interpreted == line,
            "model_{i}.rs differs from the interpreter"
        );
    }
    println!("{} models compiled and agree", programs.len());
}
