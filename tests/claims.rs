//! What the shipped models claim: nothing is refuted, and what is not proved is known here by name.

use driftwright::analysis::claims::Verdict;
use driftwright_tests::harness::interpret::compiled;
use driftwright_tests::harness::values::{model_names, read};

/// Claims that are not decided: at the sill the level is reflected, and there Ito's rule has a local time to say.
const OPEN: [(&str, &str); 1] = [("sluice_level", "noise")];

/// Models that must be stepped by an exact law alone.
const EXACT: [&str; 17] = [
    "barley_two_factor",
    "cider_forward",
    "cooling_kiln",
    "ferry_currency",
    "fog_buoy",
    "glacier_melt",
    "harbour_account",
    "harbour_toll",
    "hay_moisture",
    "market_share",
    "orchard_spot",
    "peat_season",
    "river_spread",
    "salt_price",
    "sluice_level",
    "tide_gauge",
    "twin_orchards",
];

#[test]
fn claims_of_shipped_models_hold() {
    let mut open = Vec::new();
    let mut proved = 0;
    for name in model_names("models") {
        let compiled = compiled(&name, &read(&format!("models/{name}.toml")));
        for claim in &compiled.claims {
            match claim.verdict {
                Verdict::Proved => proved += 1,
                Verdict::Open => {
                    open.push((name.clone(), claim.name.clone(), claim.reason.clone()))
                }
                Verdict::Refuted => unreachable!("a refuted claim is an error"),
            }
        }
    }
    let known = |(model, claim, _): &&(String, String, String)| {
        !OPEN.contains(&(model.as_str(), claim.as_str()))
    };
    let surprising: Vec<_> = open.iter().filter(known).collect();
    assert!(surprising.is_empty(), "open: {surprising:#?}");
    assert_eq!(
        open.len(),
        OPEN.len(),
        "a claim listed as open is proved: take it off the list"
    );
    assert!(proved > 80, "only {proved} claims");
}

#[test]
fn exact_laws_are_found_where_they_are() {
    for name in EXACT {
        let compiled = compiled(name, &read(&format!("models/{name}.toml")));
        for group in &compiled.plan.groups {
            assert!(group.is_exact(), "{name}: {:?}", group.reasons);
        }
    }
}

/// Twins that differ in what happens at an end of the domain: no claim speaks of it, only the paths tell.
const ON_PATHS_ALONE: [&str; 1] = ["sluice_level"];

/// A twin of each model with the model's claims: at least one of them is refuted.
#[test]
fn wrong_terms_refute_claims() {
    let mut refuted = Vec::new();
    for name in model_names("models") {
        let model = read(&format!("models/{name}.toml"));
        let twin = read(&format!("tests/fixtures/twins/{name}.toml"));
        let (_, claims) = model
            .split_once("[claims]")
            .expect("every model claims something");
        let source =
            driftwright::source::SourceFile::new(name.as_str(), format!("{twin}[claims]{claims}"));
        let compilation = driftwright::pipeline::compile(&source);
        if compilation.has_errors() {
            refuted.push(name);
        }
    }
    let mut silent = model_names("models");
    silent.retain(|name| !refuted.contains(name));
    assert_eq!(silent, ON_PATHS_ALONE, "twins whose claims still hold");
}
