//! `check --format sarif`: what the schema of SARIF 2.1.0 (OASIS 2020) requires of the objects used.

use serde_json::Value;

use crate::harness::{Folder, json, run};

const UNKNOWN: &str = "[model]\nname = \"m\"\n[parameters]\n\"σσ\" = 1\n[states.X]\ninitial = \"σσ\"\ndrift = \"σσ*τ\"\n";

/// The only run of a document whose head is as it must be.
fn run_of(document: &Value) -> &Value {
    assert_eq!(document["version"], "2.1.0");
    let uri = document["$schema"].as_str().unwrap();
    assert!(uri.ends_with("sarif-schema-2.1.0.json"), "{uri}");
    let runs = document["runs"].as_array().unwrap();
    assert_eq!(runs.len(), 1);
    let run = &runs[0];
    assert_eq!(run["columnKind"], "unicodeCodePoints");
    assert_eq!(run["tool"]["driver"]["name"], "driftwright");
    run
}

/// Every key of an object is one that the schema knows there: it allows no others.
fn keys_within(object: &Value, known: &[&str]) {
    for key in object.as_object().unwrap().keys() {
        assert!(known.contains(&key.as_str()), "{key} in {object}");
    }
}

fn place_is_valid(place: &Value, artifacts: &[Value]) {
    keys_within(place, &["artifactLocation", "region"]);
    let file = &place["artifactLocation"];
    let index = usize::try_from(file["index"].as_u64().unwrap()).unwrap();
    assert_eq!(artifacts[index]["location"]["uri"], file["uri"]);
    let Some(region) = place.get("region") else {
        return;
    };
    let at = |key: &str| region[key].as_u64().unwrap();
    assert!(at("startLine") >= 1 && at("startColumn") >= 1);
    let (start, end) = (
        (at("startLine"), at("startColumn")),
        (at("endLine"), at("endColumn")),
    );
    assert!(start <= end, "{region}");
}

#[test]
fn every_fixture_is_valid_and_refers_to_its_rule() {
    let folder =
        std::fs::read_dir(crate::harness::root().join("tests/fixtures/diagnostics")).unwrap();
    let mut files: Vec<String> = folder
        .map(|e| e.unwrap().file_name().into_string().unwrap())
        .filter(|name| name.ends_with(".toml"))
        .map(|name| format!("tests/fixtures/diagnostics/{name}"))
        .collect();
    files.sort();
    files.push(files[0].clone());
    let mut arguments = vec!["check", "--format", "sarif"];
    arguments.extend(files.iter().map(String::as_str));
    let ran = run(&arguments);
    assert_eq!(ran.status, 2);
    assert_eq!(ran.out, run(&arguments).out);
    let document: Value = serde_json::from_str(&ran.out).unwrap();
    let run = run_of(&document);
    let artifacts = run["artifacts"].as_array().unwrap();
    assert_eq!(artifacts.len(), files.len() - 1);
    let rules = run["tool"]["driver"]["rules"].as_array().unwrap();
    for rule in rules {
        keys_within(
            rule,
            &["id", "name", "shortDescription", "fullDescription", "help"],
        );
        assert!(rule["help"]["text"].as_str().unwrap().len() > 60, "{rule}");
    }
    let results = run["results"].as_array().unwrap();
    assert!(results.len() > files.len());
    for result in results {
        keys_within(
            result,
            &[
                "ruleId",
                "ruleIndex",
                "level",
                "message",
                "locations",
                "relatedLocations",
            ],
        );
        let index = usize::try_from(result["ruleIndex"].as_u64().unwrap()).unwrap();
        assert_eq!(rules[index]["id"], result["ruleId"]);
        assert!(["error", "warning"].contains(&result["level"].as_str().unwrap()));
        assert!(!result["message"]["text"].as_str().unwrap().is_empty());
        place_is_valid(&result["locations"][0]["physicalLocation"], artifacts);
        for other in result
            .get("relatedLocations")
            .and_then(Value::as_array)
            .into_iter()
            .flatten()
        {
            keys_within(other, &["id", "message", "physicalLocation"]);
            place_is_valid(&other["physicalLocation"], artifacts);
        }
    }
}

#[test]
fn columns_are_code_points_and_paths_are_as_given() {
    let folder = Folder::new();
    folder.write("a b.toml", UNKNOWN);
    let mut binary = crate::harness::binary();
    let output = binary
        .current_dir(folder.path(""))
        .args(["check", "--format", "sarif", "a b.toml"])
        .output()
        .unwrap();
    let text = String::from_utf8(output.stdout).unwrap();
    assert!(!text.contains(&folder.path("")), "{text}");
    let document: Value = serde_json::from_str(&text).unwrap();
    let found = &run_of(&document)["results"][0];
    assert_eq!(found["ruleId"], "DW0103");
    let place = &found["locations"][0]["physicalLocation"];
    assert_eq!(place["artifactLocation"]["uri"], "a%20b.toml");
    let region = ["startLine", "startColumn", "endLine", "endColumn"];
    assert_eq!(
        region.map(|key| place["region"][key].as_u64().unwrap()),
        [7, 13, 7, 14]
    );
}

#[test]
fn a_clean_file_has_no_results() {
    let document = json(&["check", "--format", "sarif", "models/orchard_spot.toml"]);
    assert_eq!(run_of(&document)["results"], Value::Array(Vec::new()));
}
