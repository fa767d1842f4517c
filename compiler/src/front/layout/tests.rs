//! The layout on awkward documents; shipped models and random ones are in the tests of the workspace.

use super::{Refusal, format};
use crate::source::SourceFile;

fn formatted(text: &str) -> String {
    match format(&SourceFile::new("a.toml", text)) {
        Ok(text) => text,
        Err(Refusal::Errors(found)) => panic!("{found:?}\n{text}"),
        Err(Refusal::Meaning(what)) => panic!("{what} changed\n{text}"),
    }
}

/// Formats, and formats again.
fn becomes(text: &str, expected: &str) {
    let once = formatted(text);
    assert_eq!(once, expected, "\n{once}");
    assert_eq!(formatted(&once), once);
}

#[test]
fn tables_and_keys_have_one_order() {
    becomes(
        "[claims]\nm = { is=\"a\", mean_of = 'X' }\n[states.Y]\ndrift=\"0\"\ninitial=\"w\"\n[where]\nw = \"a\"\n\
         [states . X]\nabout = \"x\"\ninitial=\"a\"\n\n\n\ndrift=\"0\"\n[parameters]\nlong_name=1\n\"a\"={about=\"b\",value=2}\n\
         [model]\nname=\"m\"",
        "[model]\nname = \"m\"\n\n[parameters]\nlong_name = 1\na         = { value = 2, about = \"b\" }\n\n\
         [where]\nw = \"a\"\n\n[states.Y]\ninitial = \"w\"\ndrift   = \"0\"\n\n[states.X]\nabout   = \"x\"\n\
         initial = \"a\"\n\ndrift   = \"0\"\n\n[claims]\nm = { mean_of = \"X\", is = \"a\" }\n",
    );
}

#[test]
fn comments_stay_with_what_they_are_about() {
    becomes(
        "# licence\n\n# about the state\n[states.X] # level\n# drift\ndrift = \"-X\"    # back\ninitial = \"0\" # start\n# tail\n\n\
         # banner\n\n[model]   \nname = \"m\" \n\n# the end\n",
        "# licence\n\n# banner\n\n[model]\nname = \"m\"\n\n# about the state\n[states.X]  # level\n\
         initial = \"0\"  # start\n# drift\ndrift   = \"-X\"  # back\n# tail\n\n# the end\n",
    );
    becomes(
        "[model]\nname = \"m\" # one\ncalculus = \"ito\" # two\n[states.X] # s\n#c\ninitial = \"0\"\ndrift = \"0\"\n[parameters]\n# none yet\n",
        "[model]\nname     = \"m\"    # one\ncalculus = \"ito\"  # two\n\n[parameters]\n# none yet\n\n\
         [states.X]  # s\n#c\ninitial = \"0\"\ndrift   = \"0\"\n",
    );
}

#[test]
fn keys_before_every_table_stay_there() {
    becomes(
        "# top\n\n# drift\nstates.X.drift = \"0\"\nmodel.name = \"m\"\nstates.X.initial='1'\n",
        "# top\n\nmodel.name       = \"m\"\n# drift\nstates.X.drift   = \"0\"\nstates.X.initial = \"1\"\n",
    );
}

#[test]
fn texts_are_kept_to_the_letter() {
    becomes(
        "[model]\r\nname = \"m\"\r\ntitle = 'a \"b\" \\ c'\r\nabout = \"\"\"\r\n  two  \r\nlines\\\r\n  on\"\"\"\r\n[states.\"\\u03C3\"]\r\n\
         initial = \"0\"\r\ndrift = '''\r\n0 +\r\n 0*σ'''\r\n",
        "[model]\nname  = \"m\"\ntitle = 'a \"b\" \\ c'\nabout = \"\"\"\n  two  \nlines\\\n  on\"\"\"\n\n[states.\"\\u03C3\"]\n\
         initial = \"0\"\ndrift   = '''\n0 +\n 0*σ'''\n",
    );
    becomes(
        "[model]\nname = \"m\"\n[states.'σ']\ninitial = \"\\u0030 + 1\"\ndrift = \"σ +1\"\n",
        "[model]\nname = \"m\"\n\n[states.\"σ\"]\ninitial = \"\\u0030 + 1\"\ndrift   = \"σ + 1\"\n",
    );
}

#[test]
fn lists_and_inline_tables_fit_their_line() {
    let drivers: Vec<String> = (0..40).map(|i| format!("'driver_{i}'")).collect();
    let text = format!(
        "[model]\nname = \"m\"\ndrivers = [{}]\n[states.X]\ninitial = \"0\"\ndrift = \"0\"\ndiffusion = {{\n  driver_0 = \"1\",\n driver_2=\"2\",\n}}\n",
        drivers.join(",")
    );
    let once = formatted(&text);
    assert!(
        once.lines().all(|line| line.chars().count() <= 120),
        "{once}"
    );
    assert!(
        once.contains("drivers = [\n    \"driver_0\", \"driver_1\","),
        "{once}"
    );
    assert!(
        once.contains("diffusion = { driver_0 = \"1\", driver_2 = \"2\" }"),
        "{once}"
    );
    assert_eq!(formatted(&once), once);
    let kept = "[model]\nname    = \"m\"\ndrivers = [\"W\",  # rain\n  \"B\"]\n\n[states.X]\ninitial = \"0\"\ndrift   = \"0\"\n";
    becomes(kept, kept);
}

#[test]
fn a_file_with_errors_is_left_alone() {
    let wrong = SourceFile::new(
        "a.toml",
        "[model]\nname = \"m\"\n[states.X]\ninitial = \"y\"\ndrift = \"0\"\n",
    );
    let Err(Refusal::Errors(found)) = format(&wrong) else {
        panic!("formatted what cannot be read");
    };
    assert_eq!(found[0].code.id(), "DW0103");
}

#[test]
fn a_change_of_meaning_is_seen() {
    let text = "[model]\nname = \"m\"\ndrivers = [\"W\"]\n[parameters]\na = { value = 2, range = \"(0, 3]\" }\n[states.X]\ninitial = \"a\"\n\
                drift = \"a*X\"\ndiffusion = \"1\"\n[claims]\nc = { drift_of = \"X^2\", is = \"2*a*X^2 + 1\" }\n";
    let read = |text: &str| super::read(&SourceFile::new("a.toml", text)).unwrap();
    let before = read(text);
    for (from, to, what) in [
        ("\"a*X\"", "\"a*X + 0\"", None),
        ("\"a*X\"", "\"X*a*1.0\"", None),
        ("\"a*X\"", "\"a*X*(1 + 1e-30)\"", Some("state `X`")),
        ("(0, 3]", "(0, 3)", Some("parameter `a`")),
        ("value = 2,", "value = 2.5,", Some("parameter `a`")),
        ("X^2 + 1", "X^2", Some("claim `c`")),
        ("c = {", "d = {", Some("claim `c`")),
        ("\"1\"", "\"2\"", Some("state `X`")),
        ("name = \"m\"", "name = \"n\"", Some("the model's name")),
    ] {
        let after = read(&text.replacen(from, to, 1));
        let found = super::meaning::difference(&before, &after);
        assert_eq!(found.as_deref(), what, "{from} to {to}");
    }
}
