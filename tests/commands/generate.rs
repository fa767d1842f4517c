//! `generate`, `schema`, `completions`: text for other programs.

use crate::harness::{Folder, altered, json, run};

#[test]
fn generated_source_is_deterministic_and_names_its_module() {
    let first = run(&["generate", "models/orchard_spot.toml"]);
    assert_eq!(first.status, 0, "{}", first.err);
    assert!(first.out.contains("pub mod orchard_spot"), "{}", first.out);
    assert_eq!(
        first.out,
        run(&["generate", "models/orchard_spot.toml"]).out
    );
    let both = run(&[
        "generate",
        "models/orchard_spot.toml",
        "models/harbour_toll.toml",
    ]);
    assert!(both.out.contains("pub mod orchard_spot") && both.out.contains("pub mod harbour_toll"));
}

#[test]
fn code_is_not_generated_from_a_refuted_claim() {
    let folder = Folder::new();
    let text = altered(
        "orchard_spot.toml",
        "is = \"mu - sigma^2/2\"",
        "is = \"mu\"",
    );
    let model = folder.write("lost.toml", &text);
    let ran = run(&["generate", &model, "--output", &folder.path("lost.rs")]);
    assert_eq!((ran.status, ran.out.as_str()), (1, ""));
    assert_eq!(folder.files(), ["lost.toml"]);
}

#[test]
fn the_schema_is_json() {
    let schema = json(&["schema"]);
    assert!(schema["$schema"].is_string() && schema["properties"]["states"].is_object());
}

#[test]
fn completions_know_the_commands() {
    for shell in ["bash", "zsh", "fish", "elvish", "powershell"] {
        let ran = run(&["completions", shell]);
        assert_eq!(ran.status, 0);
        assert!(ran.out.contains("simulate"), "{shell}");
    }
}
