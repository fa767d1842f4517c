//! What `derive` suggests, pasted into the file: the plan becomes what was promised.

use serde_json::Value;

use crate::harness::{Folder, json};

/// A model with one state; `rest` are further lines of its table.
fn text(drift: &str, diffusion: &str, rest: &str) -> String {
    format!(
        "[model]\nname = \"case\"\ndrivers = [\"W\"]\n\
         [parameters]\nm = 0.1\nk = {{ value = 1, range = \"(0, inf)\" }}\ns = {{ value = 0.3, range = \"(0, inf)\" }}\n\
         [states.x]\n# paste here\ninitial = \"3/2\"\ndrift = \"{drift}\"\ndiffusion = \"{diffusion}\"\n{rest}\n"
    )
}

fn derived(text: &str) -> Value {
    let folder = Folder::new();
    let path = folder.write("case.toml", text);
    json(&["derive", &path, "--format", "json"])
}

/// The text with a suggestion followed: keys written, keys left out.
fn pasted(text: &str, suggestion: &Value) -> String {
    let written = suggestion["write"].as_object().unwrap();
    let left_out = suggestion["leave_out"].as_array().unwrap();
    let gone = |line: &&str| {
        let key = line.split(" =").next().unwrap();
        !written.contains_key(key) && !left_out.iter().any(|k| k == key)
    };
    let kept: Vec<&str> = text.lines().filter(gone).collect();
    let lines = written
        .iter()
        .map(|(key, value)| format!("{key} = {value}"));
    let lines: Vec<String> = lines.collect();
    kept.join("\n").replace("# paste here", &lines.join("\n"))
}

/// Before: approximate, or leaving the domain. After: what the suggestion says, and nothing left to suggest.
fn kept_promise(text: &str) -> (Value, Value) {
    let before = derived(text);
    assert_eq!(before["methods"][0]["kind"], "approximate");
    let suggestion = before["suggestions"][0].clone();
    assert!(suggestion.is_object(), "nothing is suggested for\n{text}");
    let after = derived(&pasted(text, &suggestion));
    let method = after["methods"][0].clone();
    for key in ["kind", "law", "scheme", "preserves_domain"] {
        assert_eq!(method[key], suggestion[key], "{key} of\n{text}");
    }
    assert_eq!(after["suggestions"], serde_json::json!([]));
    (suggestion, method)
}

/// Geometric Brownian motion (Karatzas and Shreve 1991, section 5.6) with a scheme that was asked for, and without its
/// domain: the logarithm is the change of variable.
#[test]
fn a_logarithm_makes_geometric_brownian_motion_exact() {
    let asked = text("m*x", "s*x", "domain = \"(0, inf)\"\nscheme = \"milstein\"");
    let (suggestion, method) = kept_promise(&asked);
    assert_eq!(suggestion["write"]["through"], "log(x)");
    assert_eq!(suggestion["leave_out"], serde_json::json!(["scheme"]));
    assert_eq!(suggestion["drift"], "m - s^2/2");
    assert_eq!(suggestion["diffusion"]["W"], "s");
    assert_eq!(method["law"], "lognormal");
    let (suggestion, method) = kept_promise(&text("m*x", "s*x", ""));
    assert_eq!(suggestion["write"]["domain"], "(0, inf)");
    assert_eq!(method["law"], "lognormal");
}

/// `exp(exp(u))` of an Ornstein-Uhlenbeck process u: no table of integrals holds the way back, the drift of the
/// coordinate of unit noise is itself linear. One term of size 1e-9 more, and nothing is promised.
#[test]
fn a_coordinate_beyond_the_tables_is_found_by_its_drift() {
    let drift = "x*log(x)*(k*(m - log(log(x))) + s^2/2 + s^2*log(x)/2)";
    let domain = "domain = \"(1, inf)\"";
    let (suggestion, method) = kept_promise(&text(drift, "s*x*log(x)", domain));
    assert_eq!(suggestion["write"]["through"], "log(log(x))");
    assert_eq!(method["becomes"], "ornstein_uhlenbeck");
    let perturbed = derived(&text(&format!("{drift} + 1e-9*x^3"), "s*x*log(x)", domain));
    let suggestions = perturbed["suggestions"].as_array().unwrap();
    assert!(
        suggestions.iter().all(|s| s["kind"] != "exact"),
        "{suggestions:?}"
    );
}

/// Schemes that leave the domain: a logarithm keeps a growing stock positive, the root a square-root process with a
/// steeper drift under Feller's condition (Alfonsi 2005), where the scheme is chosen without a request; a Bessel process
/// with a cubic drift is kept inside too, where its dimension is not known to be 2 or more and no order is claimed.
#[test]
fn a_change_of_variable_keeps_the_domain() {
    let stock = text(
        "k*x*(1 - x)/(1 + x)",
        "s*x",
        "domain = \"(0, inf)\"\nscheme = \"milstein\"",
    );
    let (suggestion, method) = kept_promise(&stock);
    assert_eq!(
        suggestion["write"],
        serde_json::json!({ "through": "log(x)" })
    );
    assert_eq!(
        (&method["kind"], &method["preserves_domain"]),
        (&"approximate".into(), &true.into())
    );
    let root = text(
        "k - x^2",
        "s*sqrt(x)",
        "domain = \"(0, inf)\"\nscheme = \"milstein\"\n[assumptions]\nfeller = \"2*k >= s^2\"",
    );
    let (suggestion, method) = kept_promise(&root);
    assert_eq!(suggestion["leave_out"], serde_json::json!(["scheme"]));
    assert_eq!(method["scheme"], "drift_implicit_euler");
    assert_eq!(suggestion["coordinate"], "sqrt(x)");
    let (suggestion, _) = kept_promise(&text("1/x - k*x^3", "s", "domain = \"(0, inf)\""));
    assert_eq!(suggestion["write"]["scheme"], "drift_implicit_euler");
}

/// What is exact already has nothing to gain.
#[test]
fn exact_models_get_no_suggestion() {
    for model in ["orchard_spot", "quay_rate", "fog_buoy"] {
        let found = json(&[
            "derive",
            &format!("models/{model}.toml"),
            "--format",
            "json",
        ]);
        assert_eq!(found["suggestions"], serde_json::json!([]), "{model}");
    }
}
