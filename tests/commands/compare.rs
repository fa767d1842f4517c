//! `compare`: twenty and more pairs of models, half of which mean the same.

use std::process::Command;

use serde_json::Value;

use crate::harness::{Folder, altered, json, run, shipped};

/// Pieces of a text and what stands in their place.
type Edits = &'static [(&'static str, &'static str)];

/// Edits of shipped models after which they mean what they did, and whether a name changed.
const SAME: [(&str, Edits, bool); 11] = [
    // Layout, default values, titles, descriptions.
    (
        "honey_market",
        &[("rho   = { value = -0.6", "rho   = { value =  0.3")],
        false,
    ),
    (
        "orchard_spot",
        &[("[derived.log_S]", "# The logarithm.\n\n[derived.log_S]")],
        false,
    ),
    (
        "twin_orchards",
        &[
            ("title", "# title"),
            ("[parameters]", "[parameters] # as calibrated"),
        ],
        false,
    ),
    // Terms and factors in another order, products written out, identities under the declared ranges.
    (
        "honey_market",
        &[("\"kappa*(theta - v)\"", "\"kappa*theta - v*kappa\"")],
        false,
    ),
    ("honey_market", &[("volatility*S", "sqrt(v*S^2)")], false),
    ("honey_market", &[("\"r*S\"", "\"S*r\"")], false),
    (
        "orchard_spot",
        &[("\"sigma*S\"", "\"exp(log(sigma) + log(S))\"")],
        false,
    ),
    (
        "honey_market",
        &[("2*kappa*theta >= xi^2", "xi^2 <= 2*theta*kappa")],
        false,
    ),
    // Renamed: a parameter, a driver, several at once.
    ("honey_market", &[("kappa", "speed")], true),
    (
        "orchard_spot",
        &[("strike", "threshold"), ("sigma", "vol")],
        true,
    ),
    (
        "twin_orchards",
        &[("\"V\"", "\"Z\""), ("V.W", "Z.W"), ("{ V =", "{ Z =")],
        true,
    ),
];

/// Edits that change what a model means, with the key of the first change that is shown.
const DIFFERENT: [(&str, Edits, &str); 10] = [
    (
        "honey_market",
        &[("\"r*S\"", "\"(r + 1e-9)*S\"")],
        "states.S.drift",
    ),
    (
        "honey_market",
        &[("xi*volatility", "xi*volatility/2")],
        "states.v.diffusion.B",
    ),
    (
        "honey_market",
        &[("[-1, 1]", "(-1, 1)")],
        "parameters.rho.range",
    ),
    (
        "honey_market",
        &[("2*kappa*theta >= xi^2", "2*kappa*theta > xi^2")],
        "assumptions.kept_positive.positive",
    ),
    (
        "honey_market",
        &[("\"as_equation\"", "\"reflect\"")],
        "states.v.at_edge.lower",
    ),
    (
        "honey_market",
        &[("max(S - S0, 0)", "max(S - 2*S0, 0)")],
        "readouts.call.formula",
    ),
    (
        "twin_orchards",
        &[("V.W = \"rho\"", "V.W = \"-rho\"")],
        "correlation.V.W",
    ),
    (
        "orchard_spot",
        &[("\"ito\"", "\"stratonovich\"")],
        "calculus",
    ),
    (
        "orchard_spot",
        &[("initial   = \"S0\"", "initial   = \"2*S0\"")],
        "states.S.initial",
    ),
    (
        "orchard_spot",
        &[(
            "[derived.log_S]\nformula = \"log(S)\"",
            "[derived.log_S]\nformula = \"2*log(S)\"",
        )],
        "derived.log_S.formula",
    ),
];

/// A model and an edit of it in a folder, compared.
fn compared(model: &str, edits: &[(&str, &str)]) -> Value {
    let folder = Folder::new();
    let path = format!("models/{model}.toml");
    let mut text = shipped(&format!("{model}.toml"));
    for (from, to) in edits {
        assert!(text.contains(from), "{model} holds no {from}");
        text = text.replace(from, to);
    }
    let edited = folder.write("edited.toml", &text);
    json(&["compare", &path, &edited, "--format", "json"])
}

#[test]
fn what_means_the_same_is_no_change() {
    for (model, edits, renamed) in SAME {
        let found = compared(model, edits);
        assert_eq!(found["same_meaning"], true, "{model} {edits:?}: {found:#}");
        let names = found["renamed"].as_object().expect("a table");
        assert_eq!(!names.is_empty(), renamed, "{model} {edits:?}: {found:#}");
    }
}

#[test]
fn what_means_something_else_is_shown() {
    for (model, edits, key) in DIFFERENT {
        let found = compared(model, edits);
        assert_eq!(found["same_meaning"], false, "{model} {edits:?}");
        let keys: Vec<&Value> = found["changes"]
            .as_array()
            .expect("a list")
            .iter()
            .map(|c| &c["key"])
            .collect();
        assert!(
            keys.contains(&&Value::from(key)),
            "{model} {edits:?}: {found:#}"
        );
    }
}

/// A parameter that comes where another goes is not the other renamed: no formula agrees under it.
#[test]
fn a_renaming_is_not_guessed() {
    let folder = Folder::new();
    let model = |name: &str, drift: &str| {
        let text = format!(
            "[model]\nname = \"level\"\ndrivers = [\"W\"]\n[parameters]\n{name} = 1\n[states.X]\n\
             initial = \"1\"\ndrift = \"{drift}\"\ndiffusion = \"1\"\n"
        );
        folder.write(&format!("{name}.toml"), &text)
    };
    let (old, new) = (model("a", "a*X"), model("b", "X/(1 + b^2)"));
    let found = json(&["compare", &old, &new, "--format", "json"]);
    assert_eq!(found["renamed"], serde_json::json!({}));
    let keys = found["changes"].as_array().expect("a list").iter();
    let keys: Vec<&Value> = keys.map(|c| &c["key"]).collect();
    let expected = ["parameters.b.range", "states.X.drift", "parameters.a.range"];
    assert_eq!(keys, expected.map(Value::from).iter().collect::<Vec<_>>());
}

/// A lost half sigma squared in a drift reaches the drift of the logarithm and the mean (Hull 2018,
/// section 14.7; from memory).
#[test]
fn what_follows_from_a_change_is_shown() {
    let found = compared("orchard_spot", &[("\"mu*S\"", "\"(mu - sigma^2/2)*S\"")]);
    let change = &found["changes"][0];
    assert_eq!(change["key"], "states.S.drift");
    assert_eq!(change["difference"], "-sigma^2*S/2");
    assert_eq!(change["proved"], true);
    let effects = found["effects"].as_array().expect("a list");
    let of = |of: &str, what: &str| effects.iter().find(|e| e["of"] == of && e["what"] == what);
    assert_eq!(
        of("log_S", "drift").expect("an effect")["new"],
        "mu - sigma^2"
    );
    assert!(of("log_S", "Ito correction").is_none(), "it did not change");
    assert_eq!(of("S", "mean").expect("an effect")["old"], "S0*exp(mu*t)");
}

#[test]
fn an_earlier_revision_is_read_from_git() {
    let folder = Folder::new();
    let model = folder.write("m.toml", &shipped("orchard_spot.toml"));
    let git = |arguments: &[&str]| {
        let ran = Command::new("git")
            .args([
                "-C",
                &folder.path("."),
                "-c",
                "user.name=a",
                "-c",
                "user.email=a@b",
            ])
            .args(arguments)
            .output()
            .expect("git runs");
        assert!(
            ran.status.success(),
            "{}",
            String::from_utf8_lossy(&ran.stderr)
        );
    };
    git(&["init", "-q"]);
    git(&["add", "m.toml"]);
    git(&["commit", "-qm", "first"]);
    folder.write(
        "m.toml",
        &altered("orchard_spot.toml", "\"mu*S\"", "\"2*mu*S\""),
    );
    let found = json(&["compare", "--since", "HEAD", &model, "--format", "json"]);
    assert_eq!(found["changes"][0]["key"], "states.S.drift");
    let ran = run(&["compare", "--since", "no-such-revision", &model]);
    assert_eq!(ran.status, 2);
    assert!(ran.err.contains("no-such-revision"), "{}", ran.err);
}

#[test]
fn every_form_is_written() {
    let pair = ["models/orchard_spot.toml", "models/twin_orchards.toml"];
    for (format, begins) in [
        ("text", "Changes of"),
        ("markdown", "# Changes of"),
        ("html", "<!DOCTYPE html>"),
    ] {
        let ran = run(&["compare", pair[0], pair[1], "--format", format]);
        assert_eq!(ran.status, 0, "{}", ran.err);
        assert!(ran.out.starts_with(begins), "{format}");
    }
    assert_eq!(
        run(&["compare", pair[0]]).status,
        2,
        "a second file is wanted"
    );
}
