//! `derive`: the dossier in its forms.

use crate::harness::{Folder, altered, golden, json, run};

/// Models whose dossiers are pinned: one driver, Stratonovich, correlated drivers, approximate, a
/// system with a deterministic state.
const PINNED: [&str; 5] = [
    "orchard_spot",
    "glacier_melt",
    "twin_orchards",
    "kelp_stock",
    "cooling_kiln",
];

#[test]
fn dossiers_are_as_pinned() {
    for model in PINNED {
        let path = format!("models/{model}.toml");
        let forms = [
            ("text", "txt"),
            ("markdown", "md"),
            ("html", "html"),
            ("latex", "tex"),
            ("json", "json"),
        ];
        for (format, ending) in forms {
            let ran = run(&["derive", &path, "--format", format]);
            assert_eq!(ran.status, 0, "{model}: {}", ran.err);
            golden(&format!("derive/{model}.{ending}"), &ran.out);
        }
    }
}

#[test]
fn text_fits_a_hundred_columns() {
    for model in PINNED {
        let ran = run(&["derive", &format!("models/{model}.toml")]);
        for line in ran.out.lines() {
            assert!(line.chars().count() <= 100, "{model}: {line}");
            assert!(!line.ends_with(' '), "{model}: {line:?}");
        }
    }
}

/// The example of the language page: Ito's rule for the logarithm of a geometric Brownian motion
/// (Hull 2018, section 14.7; from memory).
#[test]
fn json_holds_the_contract() {
    let found = json(&["derive", "models/orchard_spot.toml", "--format", "json"]);
    assert_eq!(found["model"], "orchard_spot");
    assert_eq!(found["calculus"], "ito");
    assert_eq!(found["states"]["S"]["drift"], "mu*S");
    assert_eq!(found["states"]["S"]["diffusion"]["W"], "sigma*S");
    let log = &found["derived"]["log_S"];
    assert_eq!(log["formula"], "log(S)");
    assert_eq!(log["drift"], "mu - sigma^2/2");
    assert_eq!(log["diffusion"]["W"], "sigma");
    assert_eq!(log["chain_rule_drift"], "mu");
    assert_eq!(log["ito_correction"], "-sigma^2/2");
    let method = &found["methods"][0];
    assert_eq!(method["states"], serde_json::json!(["S"]));
    assert_eq!(method["kind"], "exact");
    assert_eq!(method["law"], "lognormal");
    assert_eq!(method["through"]["S"], "log(S)");
    assert_eq!(method["becomes"], "arithmetic_brownian_motion");
    assert_eq!(method["scheme"], "exact");
    assert!(method["strong_order"].is_null() && method["weak_order"].is_null());
    assert_eq!(method["preserves_domain"], true);
    assert_eq!(found["claims"]["log_drift"]["verdict"], "proved");
    assert_eq!(found["diagnostics"], serde_json::json!([]));
}

#[test]
fn a_formula_is_derived_on_the_spot() {
    // d(S^2) = (2 mu + sigma^2) S^2 dt + 2 sigma S^2 dW.
    let found = json(&[
        "derive",
        "models/orchard_spot.toml",
        "--of",
        "S^2",
        "--format",
        "json",
    ]);
    let derived = found["derived"].as_object().unwrap();
    assert_eq!(derived.keys().collect::<Vec<_>>(), ["of"]);
    assert_eq!(derived["of"]["chain_rule_drift"], "2*mu*S^2");
    assert_eq!(derived["of"]["ito_correction"], "sigma^2*S^2");
    assert_eq!(derived["of"]["diffusion"]["W"], "2*sigma*S^2");
    let text = run(&["derive", "models/orchard_spot.toml", "--of", "-S"]);
    assert_eq!(text.status, 0, "{}", text.err);
    assert!(text.out.contains("dF"), "{}", text.out);
    for wrong in ["abs(S)", "log(", "Q"] {
        let ran = run(&["derive", "models/orchard_spot.toml", "--of", wrong]);
        assert_eq!((ran.status, ran.out.as_str()), (2, ""), "{wrong}");
        assert!(
            ran.err.contains("DW02") || ran.err.contains("DW01"),
            "{}",
            ran.err
        );
    }
}

#[test]
fn evidence_is_written_although_a_claim_is_refuted() {
    let folder = Folder::new();
    let text = altered(
        "orchard_spot.toml",
        "is = \"mu - sigma^2/2\"",
        "is = \"mu\"",
    );
    let model = folder.write("lost.toml", &text);
    let dossier = folder.path("dossier.md");
    let ran = run(&[
        "derive", &model, "--format", "markdown", "--output", &dossier,
    ]);
    assert_eq!((ran.status, ran.out.as_str()), (1, ""));
    let text = std::fs::read_to_string(&dossier).unwrap();
    assert!(
        text.contains("refuted") && text.contains("difference"),
        "{text}"
    );
}

#[test]
fn nothing_is_written_for_a_wrong_model() {
    let folder = Folder::new();
    let model = folder.write(
        "m.toml",
        &altered("orchard_spot.toml", "\"mu*S\"", "\"mu*Q\""),
    );
    let dossier = folder.path("dossier.txt");
    let ran = run(&["derive", &model, "--output", &dossier]);
    assert_eq!((ran.status, ran.out.as_str()), (2, ""));
    assert_eq!(folder.files(), ["m.toml"]);
}
