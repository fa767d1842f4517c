//! The command line itself: help, wrong options, closed pipes.

use std::process::Stdio;

use crate::harness::{Folder, altered, binary, json, run};

#[test]
fn help_shows_examples() {
    for command in [
        "check",
        "derive",
        "generate",
        "simulate",
        "verify",
        "format",
        "schema",
        "completions",
    ] {
        let long = run(&[command, "--help"]);
        assert_eq!(long.status, 0);
        assert!(
            long.out.contains("Example") && long.out.contains("driftwright"),
            "{}",
            long.out
        );
        assert!(run(&[command, "-h"]).out.len() < long.out.len());
    }
    assert!(run(&["--help"]).out.contains("Exit status"));
    assert!(run(&["--version"]).out.contains(env!("CARGO_PKG_VERSION")));
}

#[test]
fn wrong_command_lines_are_status_2_and_say_why() {
    let orchard = "models/orchard_spot.toml";
    let cases: [(&[&str], &str); 14] = [
        (&["simulate"], "<FILE>"),
        (&["simulat", orchard], "simulate"),
        (&["simulate", orchard, "--paths", "0"], "whole number"),
        (&["simulate", orchard, "--paths", "1.5"], "whole number"),
        (&["simulate", orchard, "--horizon", "-1"], "after 0"),
        (&["simulate", orchard, "--times", "1,0.5"], "increasing"),
        (
            &["simulate", orchard, "--times", "1,2", "--horizon", "1.5"],
            "beyond the horizon",
        ),
        (
            &["simulate", orchard, "--set", "sigmas=0.3"],
            "did you mean `sigma`?",
        ),
        (&["simulate", orchard, "--set", "sigma"], "NAME=VALUE"),
        (
            &["simulate", orchard, "--set", "sigma=-1"],
            "outside its range",
        ),
        (&["simulate", orchard, "--part", "3/2"], "I/N"),
        (&["simulate", orchard, "--output", "x.txt"], ".csv or .npy"),
        (&["simulate", orchard, "--plot", "x.png"], ".svg"),
        (&["check"], "FILE"),
    ];
    for (arguments, reason) in cases {
        let ran = run(arguments);
        assert_eq!((ran.status, ran.out.as_str()), (2, ""), "{arguments:?}");
        assert!(ran.err.contains(reason), "{arguments:?}: {}", ran.err);
    }
}

#[test]
fn a_parameter_without_a_value_must_be_given() {
    let folder = Folder::new();
    let text = altered(
        "orchard_spot.toml",
        "S0     = 42.0",
        "S0     = { about = \"price today\" }",
    );
    let model = folder.write("m.toml", &text);
    let ran = run(&["simulate", &model, "--paths", "100"]);
    assert_eq!((ran.status, ran.out.as_str()), (2, ""));
    assert!(ran.err.contains("--set S0=VALUE"), "{}", ran.err);
    assert_eq!(
        run(&["simulate", &model, "--paths", "100", "--set", "S0=42"]).status,
        0
    );
}

#[test]
fn a_reader_that_goes_away_is_no_fault() {
    for arguments in [
        &["derive", "models/orchard_spot.toml"][..],
        &["schema"],
        &["completions", "bash"],
    ] {
        let mut child = binary()
            .args(arguments)
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .unwrap();
        drop(child.stdout.take());
        let output = child.wait_with_output().unwrap();
        assert_eq!(String::from_utf8_lossy(&output.stderr), "", "{arguments:?}");
        assert_eq!(output.status.code(), Some(0), "{arguments:?}");
    }
}

#[test]
fn no_colour_and_no_progress_where_there_is_no_terminal() {
    let ran = run(&["verify", "models/orchard_spot.toml", "--paths", "20000"]);
    assert!(!ran.out.contains('\u{1b}') && !ran.err.contains('\u{1b}'));
    assert_eq!(ran.err, "");
}

/// `--set` names a parameter as the file does, however accents are composed; a name that only looks like
/// one is told apart.
#[test]
fn names_on_the_command_line_are_composed() {
    let folder = Folder::new();
    let text = "[model]\nname = \"m\"\n[parameters]\n\"e\u{301}tape\" = 1\n\
                [states.X]\ninitial = \"\u{e9}tape\"\ndrift = \"0\"\n";
    let file = folder.write("m.toml", text);
    for name in ["\u{e9}tape", "e\u{301}tape"] {
        let set = format!("{name}=3");
        let found = json(&[
            "simulate", &file, "--paths", "2", "--set", &set, "--format", "json",
        ]);
        assert_eq!(found["quantities"]["X"]["mean"][0], 3.0);
    }
    let ran = run(&["simulate", &file, "--set", "\u{e9}t\u{430}pe=3"]);
    assert_eq!(ran.status, 2);
    assert!(ran.err.contains("U+0430"), "{}", ran.err);
}
