//! `check`: findings, verdicts, exit statuses.

use crate::harness::{Folder, altered, json, models, run};

#[test]
fn every_shipped_model_is_fine() {
    let paths: Vec<String> = models().iter().map(|m| format!("models/{m}")).collect();
    let mut arguments = vec!["check", "--format", "json"];
    arguments.extend(paths.iter().map(String::as_str));
    let found = json(&arguments);
    let files = found["files"].as_array().unwrap();
    assert_eq!(files.len(), paths.len());
    for (file, path) in files.iter().zip(&paths) {
        assert_eq!(file["path"], path.as_str());
        for diagnostic in file["diagnostics"].as_array().unwrap() {
            assert_eq!(diagnostic["severity"], "warning", "{path}: {diagnostic}");
        }
    }
}

#[test]
fn findings_point_inside_the_formula() {
    let folder = Folder::new();
    let model = folder.write(
        "m.toml",
        &altered(
            "orchard_spot.toml",
            "drift     = \"mu*S\"",
            "drift     = \"mv*S\"",
        ),
    );
    let ran = run(&["check", "--format", "json", &model]);
    assert_eq!(ran.status, 2);
    let found: serde_json::Value = serde_json::from_str(&ran.out).unwrap();
    let diagnostics = found["files"][0]["diagnostics"].as_array().unwrap();
    let wrong = diagnostics.iter().find(|d| d["code"] == "DW0103").unwrap();
    assert_eq!(
        (&wrong["column"], &wrong["end_column"]),
        (&14.into(), &16.into())
    );
    assert!(wrong["hint"].as_str().unwrap().contains("mu"), "{wrong}");
    let human = run(&["check", &model]);
    assert_eq!(human.status, 2);
    assert!(
        human.out.contains("DW0103") && human.out.contains("mv*S"),
        "{}",
        human.out
    );
}

#[test]
fn a_refuted_claim_is_status_1_and_the_worst_status_counts() {
    let folder = Folder::new();
    let lost = folder.write(
        "lost.toml",
        &altered(
            "orchard_spot.toml",
            "is = \"mu - sigma^2/2\"",
            "is = \"mu\"",
        ),
    );
    let ran = run(&["check", &lost]);
    assert_eq!(ran.status, 1, "{}", ran.out);
    assert!(ran.out.contains("sigma^2/2"), "{}", ran.out);
    let broken = folder.write("broken.toml", "[model]\nname = 3\n");
    assert_eq!(run(&["check", "models/orchard_spot.toml", &lost]).status, 1);
    assert_eq!(
        run(&["check", &lost, &broken, "models/orchard_spot.toml"]).status,
        2
    );
}

#[test]
fn warnings_can_be_denied() {
    let folder = Folder::new();
    let text = altered(
        "orchard_spot.toml",
        "[parameters]",
        "[parameters]\nidle = 1.0",
    );
    let model = folder.write("m.toml", &text);
    assert_eq!(run(&["check", &model]).status, 0);
    assert_eq!(run(&["check", "--deny-warnings", &model]).status, 2);
}

#[test]
fn files_that_cannot_be_read_are_findings() {
    let folder = Folder::new();
    let ran = run(&["check", "--format", "json", &folder.path("none.toml")]);
    assert_eq!(ran.status, 2);
    assert!(ran.out.contains("DW0001"), "{}", ran.out);
}

#[test]
fn codes_are_explained() {
    let ran = run(&["check", "--explain", "DW0103"]);
    assert_eq!(ran.status, 0);
    assert!(ran.out.starts_with("DW0103"));
    let none = run(&["check", "--explain", "DW9999"]);
    assert_eq!(none.status, 2);
    assert!(none.err.contains("DW9999"));
}
