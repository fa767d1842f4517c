//! The README's commands, run as they stand.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};

use driftwright_tests::harness::values::{read, repository};

/// The fenced blocks of a language, in order.
fn blocks(text: &str, language: &str) -> Vec<String> {
    let fence = format!("```{language}\n");
    let after = text.split(&fence).skip(1);
    let inside = after.map(|rest| rest.split("```").next().unwrap_or_default().to_string());
    inside.collect()
}

/// The top level of the repository, spelt as cargo spells it, so that nothing is built twice.
fn clone() -> PathBuf {
    repository().canonicalize().expect("the repository")
}

/// Runs a script in a folder, building into a folder of the workspace's target directory.
fn run(script: &str, folder: &Path, target: &str) -> Output {
    Command::new("bash")
        .args(["-euo", "pipefail", "-c", script])
        .current_dir(folder)
        .env("CARGO_TARGET_DIR", clone().join("target").join(target))
        .env("CARGO_NET_OFFLINE", "true")
        .env_remove("RUSTFLAGS")
        .output()
        .expect("bash runs")
}

/// Standard output of a script that must succeed.
#[track_caller]
fn succeed(script: &str, folder: &Path, target: &str) -> String {
    let output = run(script, folder, target);
    assert!(
        output.status.success(),
        "{script}\n{}{}",
        String::from_utf8_lossy(&output.stdout),
        String::from_utf8_lossy(&output.stderr)
    );
    String::from_utf8_lossy(&output.stdout).into_owned()
}

#[test]
fn first_block_is_the_two_commands() {
    let readme = read("README.md");
    let first = &blocks(&readme, "sh")[0];
    let commands: Vec<&str> = first.lines().collect();
    assert_eq!(commands.len(), 2, "{first}");
    assert_eq!(commands[1], "cargo test --workspace --all-features");
    // The gate runs the second as it stands.
    assert!(read(".ci/run").lines().any(|line| line == commands[1]));
    let screen = succeed(commands[0], &clone(), "");
    for part in ["mu - sigma^2/2", "exact", "lognormal", "mean", "42"] {
        assert!(screen.contains(part), "no {part} on the screen:\n{screen}");
    }
    assert!(
        screen.lines().count() <= 60,
        "more than a screen:\n{screen}"
    );
}

#[test]
fn first_model_compiles_and_its_claims_hold() {
    let readme = read("README.md");
    let model = &blocks(&readme, "toml")[0];
    let folder = tempfile::tempdir().expect("a folder");
    std::fs::write(folder.path().join("ferry_fuel.toml"), model).expect("a file");
    let tool = "cargo run -q --all-features --bin driftwright --manifest-path \"$REPOSITORY/Cargo.toml\" --";
    let commands = blocks(&readme, "sh")[1].replace("driftwright ", &format!("{tool} "));
    let commands = format!("REPOSITORY='{}'\n{commands}", clone().display());
    let output = succeed(&commands, folder.path(), "");
    assert!(output.contains("mu/2 - sigma^2/8"), "{output}");
    assert!(folder.path().join("fuel.svg").exists());
    let wrong = model.replace("sigma^2/8", "sigma^2/4");
    std::fs::write(folder.path().join("ferry_fuel.toml"), wrong).expect("a file");
    let check = commands.lines().take(2).collect::<Vec<_>>().join("\n");
    assert_eq!(run(&check, folder.path(), "").status.code(), Some(1));
}

/// The user's crate beside the clone, from an empty folder.
#[test]
fn own_crate_builds_and_runs() {
    let folder = tempfile::tempdir().expect("a folder");
    std::os::unix::fs::symlink(clone(), folder.path().join("driftwright")).expect("a link");
    let script = &blocks(&read("README.md"), "sh")[2];
    let output = succeed(script, folder.path(), "readme");
    // The mean is 42 exp(0.05) at one year.
    let analytic = 42.0 * 0.05_f64.exp();
    let last = output.lines().last().expect("two lines");
    let mut numbers = last
        .split(|c: char| !(c.is_ascii_digit() || c == '.'))
        .filter_map(|n| n.parse().ok());
    let [_, mean, std_error]: [f64; 3] =
        std::array::from_fn(|_| numbers.next().expect("three numbers"));
    assert!(
        (mean - analytic).abs() < 4.0 * std_error,
        "{last} against {analytic}"
    );
}
