//! `signoff` and `check --require-signoff`.

use std::fs;

use crate::harness::{Folder, altered, run, shipped};

/// A copy of a shipped model in a folder, signed off.
fn signed(folder: &Folder) -> String {
    let model = folder.write("m.toml", &shipped("honey_market.toml"));
    let ran = run(&[
        "signoff",
        &model,
        "--by",
        "R. Reviewer",
        "--note",
        "read \"all\" of it",
    ]);
    assert_eq!(ran.status, 0, "{}", ran.err);
    model
}

/// The status of a check that wants the sign-off, and the codes it found beside refuted claims.
fn judged(model: &str) -> (i32, Vec<String>) {
    let ran = run(&["check", "--require-signoff", model, "--format", "json"]);
    let found: serde_json::Value = serde_json::from_str(&ran.out).expect("JSON");
    let list = found["files"][0]["diagnostics"].as_array().expect("a list");
    let codes = list
        .iter()
        .map(|d| d["code"].as_str().unwrap_or_default().to_owned());
    (ran.status, codes.filter(|code| code != "DW0502").collect())
}

fn only(code: &str) -> (i32, Vec<String>) {
    (1, vec![code.to_owned()])
}

#[test]
fn a_model_without_one_is_refused() {
    assert_eq!(judged("models/honey_market.toml"), only("DW0801"));
    assert_eq!(
        run(&["check", "models/honey_market.toml"]).status,
        0,
        "only where it is wanted"
    );
}

#[test]
fn cosmetics_and_calibration_keep_it_valid() {
    let folder = Folder::new();
    let model = signed(&folder);
    assert_eq!(judged(&model), (0, Vec::new()));
    let edits = [
        ("value = -0.6", "value = -0.55"),
        ("title", "# a new line\ntitle"),
        ("\"kappa*(theta - v)\"", "\"kappa*theta - kappa*v\""),
        ("theta", "level"),
    ];
    let mut text = fs::read_to_string(&model).expect("the model");
    for (from, to) in edits {
        assert!(text.contains(from), "{from}");
        text = text.replace(from, to);
        folder.write("m.toml", &text);
        assert_eq!(judged(&model), (0, Vec::new()), "{from} -> {to}");
    }
}

#[test]
fn a_change_of_meaning_voids_it_and_is_shown() {
    let folder = Folder::new();
    let model = signed(&folder);
    for (from, to, shown) in [
        ("\"r*S\"", "\"2*r*S\"", "states.S.drift: was r*S, is 2*r*S"),
        (
            "[-1, 1]",
            "[-1, 0]",
            "parameters.rho.range: was [-1, 1], is [-1, 0]",
        ),
        (
            "\"full_truncation_euler\"",
            "\"quadratic_exponential\"",
            "states.v.scheme",
        ),
    ] {
        folder.write("m.toml", &altered("honey_market.toml", from, to));
        assert_eq!(judged(&model), only("DW0802"), "{from} -> {to}");
        let ran = run(&["check", "--require-signoff", &model]);
        assert!(ran.out.contains(shown), "{}", ran.out);
        assert!(ran.out.contains("R. Reviewer"), "{}", ran.out);
    }
}

#[test]
fn a_file_changed_by_hand_is_noticed() {
    let folder = Folder::new();
    let model = signed(&folder);
    let beside = folder.path("m.signoff.toml");
    let text = fs::read_to_string(&beside).expect("the sign-off");
    for (from, to) in [
        (
            "\"states.S.drift\" = \"r*S\"",
            "\"states.S.drift\" = \"2*r*S\"",
        ),
        ("states = [\"S\", \"v\"]", "states = [\"v\", \"S\"]"),
        ("form = 1", "form = 9"),
        ("[derivation.entries]", "[derivation.others]"),
    ] {
        assert!(text.contains(from), "{from}");
        fs::write(&beside, text.replace(from, to)).expect("written");
        assert_eq!(judged(&model), only("DW0803"), "{from} -> {to}");
    }
    fs::write(&beside, [0xff, 0xfe, 0]).expect("written");
    assert_eq!(judged(&model), only("DW0803"));
    fs::write(&beside, &text).expect("written");
    assert_eq!(judged(&model), (0, Vec::new()));
}

/// Every shipped model can be signed off, and what is read back is what was signed.
#[test]
fn every_model_can_be_signed_off() {
    let folder = Folder::new();
    for name in crate::harness::models() {
        let model = folder.write(&name, &shipped(&name));
        assert_eq!(run(&["signoff", &model, "--by", "R"]).status, 0, "{name}");
        assert_eq!(judged(&model), (0, Vec::new()), "{name}");
    }
}

/// `models/*.toml` names the sign-offs too; they are no models.
#[test]
fn sign_offs_among_several_files_are_left_out() {
    let folder = Folder::new();
    let model = signed(&folder);
    let beside = folder.path("m.signoff.toml");
    let text = fs::read_to_string(&beside).expect("the sign-off");
    for command in ["check", "format", "generate", "verify"] {
        let mut arguments = vec![command, &model, &beside];
        if command == "verify" {
            arguments.extend(["--paths", "1000"]);
        }
        let ran = run(&arguments);
        assert_eq!(ran.status, 0, "{command}: {}", ran.err);
    }
    assert_eq!(fs::read_to_string(&beside).expect("as before"), text);
    assert_eq!(run(&["check", &beside]).status, 2, "alone it is no model");
}

#[test]
fn what_cannot_be_signed_off() {
    let folder = Folder::new();
    let wrong = altered("orchard_spot.toml", "mu - sigma^2/2", "mu - sigma^2/4");
    let model = folder.write("m.toml", &wrong);
    assert_eq!(
        run(&["signoff", &model, "--by", "R"]).status,
        1,
        "a refuted claim"
    );
    assert!(
        fs::metadata(folder.path("m.signoff.toml")).is_err(),
        "nothing was written"
    );
    assert_eq!(
        run(&["signoff", "models/orchard_spot.toml", "--by", " "]).status,
        2
    );
    assert_eq!(
        run(&["signoff", "models/orchard_spot.toml"]).status,
        2,
        "nobody"
    );
}
