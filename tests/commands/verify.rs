//! `verify`: what is right passes, what is wrong is seen.

use serde_json::Value;

use crate::harness::{Folder, altered, json, run};

/// The mean of a sine: for Y normal with mean m and variance s^2, E[sin(Y)] = exp(-s^2/2) sin(m), the
/// imaginary part of the characteristic function (Lukacs 1970, "Characteristic Functions", table 1; from
/// memory). The compiler has no rule for it, so that the claim is open and only the simulation can tell.
const SINE: &str = "exp(-sigma^2*t/2)*sin(log(S0) + (mu - sigma^2/2)*t)";

fn with_sine_claim(value: &str) -> String {
    let claim = format!("[claims]\nsine = {{ mean_of = \"sin(log(S))\", is = \"{value}\" }}");
    altered("orchard_spot.toml", "[claims]", &claim)
}

#[test]
fn json_holds_the_contract() {
    let found = json(&["verify", "models/orchard_spot.toml", "--format", "json"]);
    assert_eq!(found["model"], "orchard_spot");
    assert_eq!(found["passed"], true);
    let checks = found["checks"].as_array().unwrap();
    assert!(checks.len() >= 8);
    for check in checks {
        for key in ["quantity", "statistic", "source"] {
            assert!(check[key].is_string(), "{check}");
        }
        for key in ["time", "analytic", "sample", "std_error", "z"] {
            assert!(check[key].is_f64(), "{check}");
        }
        assert_eq!(check["passed"], true, "{check}");
    }
    let mean = checks
        .iter()
        .find(|c| c["quantity"] == "S" && c["statistic"] == "mean")
        .unwrap();
    // E[S] = S0 exp(mu t), Var[S] = S0^2 exp(2 mu t)(exp(sigma^2 t) - 1): Hull (2018), section 15.1.
    let expected = 42.0 * 0.05_f64.exp();
    assert!((mean["analytic"].as_f64().unwrap() - expected).abs() < 1e-10 * expected);
    let error = expected * (0.04_f64.exp() - 1.0).sqrt() / 1e5_f64.sqrt();
    assert!((mean["std_error"].as_f64().unwrap() - error).abs() < 1e-9 * error);
}

/// A linear drift closes the equation of the mean, m + (x0 - m) exp(-k t) (Karatzas & Shreve 1991, section 5.6), noise of
/// another power than a half leaves that of the variance open: the mean is checked all the same.
#[test]
fn a_mean_is_checked_where_the_variance_is_not_known() {
    let folder = Folder::new();
    let text = "[model]\nname = \"m\"\ndrivers = [\"W\"]\n[states.x]\ninitial = \"0.4\"\ndrift = \"1.2*(0.5 - x)\"\n\
                diffusion = \"0.4*x^(7/10)\"\ndomain = \"(0, inf)\"\n";
    let model = folder.write("power.toml", text);
    let found = json(&["verify", &model, "--paths", "20000", "--format", "json"]);
    let [mean] = &found["checks"].as_array().unwrap()[..] else {
        panic!("{found}");
    };
    assert_eq!(
        (&mean["statistic"], &mean["passed"]),
        (&"mean".into(), &true.into())
    );
    let expected = 0.5 - 0.1 * (-1.2_f64).exp();
    assert!((mean["analytic"].as_f64().unwrap() - expected).abs() < 1e-9);
}

#[test]
fn an_open_claim_is_put_to_the_test() {
    let folder = Folder::new();
    let right = folder.write("right.toml", &with_sine_claim(SINE));
    let found = json(&["verify", &right, "--format", "json"]);
    assert_eq!(found["claims"]["sine"], "open");
    let checks = found["checks"].as_array().unwrap();
    assert!(
        checks
            .iter()
            .any(|c| c["claim"] == "sine" && c["passed"] == true)
    );
}

#[test]
fn a_lost_correction_in_an_open_claim_is_seen() {
    let folder = Folder::new();
    let lost = SINE.replace("(mu - sigma^2/2)", "mu");
    let wrong = folder.write("wrong.toml", &with_sine_claim(&lost));
    let ran = run(&["verify", &wrong, "--format", "json"]);
    assert_eq!(ran.status, 1);
    let found: Value = serde_json::from_str(&ran.out).unwrap();
    assert_eq!(found["passed"], false);
    for check in found["checks"].as_array().unwrap() {
        assert_eq!(
            check["passed"] == false,
            check["claim"] == "sine",
            "{check}"
        );
    }
    let human = run(&["verify", &wrong]);
    assert!(
        human.out.contains("FAILS") && human.out.contains("Not verified"),
        "{}",
        human.out
    );
}

#[test]
fn a_refuted_claim_fails_with_its_evidence() {
    let folder = Folder::new();
    let text = altered(
        "orchard_spot.toml",
        "is = \"mu - sigma^2/2\"",
        "is = \"mu\"",
    );
    let ran = run(&[
        "verify",
        &folder.write("lost.toml", &text),
        "--paths",
        "20000",
    ]);
    assert_eq!(ran.status, 1);
    assert!(
        ran.out.contains("refuted") && ran.out.contains("Not verified"),
        "{}",
        ran.out
    );
}

#[test]
fn one_screen_shows_derivation_method_simulation_and_moments() {
    let ran = run(&["verify", "models/orchard_spot.toml"]);
    assert_eq!(ran.status, 0, "{}", ran.err);
    for part in [
        "Derivation",
        "Ito correction -sigma^2/2",
        "Method",
        "lognormal",
        "100,000 paths",
        "analytic",
        "All ",
    ] {
        assert!(ran.out.contains(part), "{part}: {}", ran.out);
    }
    assert!(
        ran.out.lines().count() <= 60,
        "{} lines",
        ran.out.lines().count()
    );
    assert!(ran.out.lines().all(|line| line.chars().count() <= 100));
}

/// Euler's scheme with two steps is far off: the bias is shown, and what it explains is no failure.
#[test]
fn the_bias_of_a_coarse_step_is_shown_and_allowed_for() {
    let folder = Folder::new();
    let text = altered(
        "orchard_spot.toml",
        "domain    = \"(0, inf)\"",
        "scheme    = \"euler_maruyama\"",
    );
    let text = text.replace("mu     = { value = 0.05", "mu     = { value = 0.5");
    let (text, _) = text.split_once("[derived.log_S]").unwrap();
    let model = folder.write("coarse.toml", text);
    let found = json(&["verify", &model, "--steps", "8", "--format", "json"]);
    let checks = found["checks"].as_array().unwrap();
    let mean = checks.iter().find(|c| c["statistic"] == "mean").unwrap();
    // E[X_N] = S0 (1 + mu h)^N for Euler's scheme (Kloeden and Platen 1992, section 9.7), against
    // S0 exp(mu T).
    let bias = 42.0 * ((1.0 + 0.5_f64 / 8.0).powi(8) - 0.5_f64.exp());
    let estimated = mean["bias"].as_f64().unwrap();
    assert!(
        (estimated / bias - 1.0).abs() < 0.1,
        "{estimated} against {bias}"
    );
    assert!(mean["z"].as_f64().unwrap() < -10.0, "{mean}");
    assert_eq!(mean["passed"], true);
}

/// The evidence as a page: every check in the table and in the drawing, valid HTML; where a check fails
/// the page is written all the same and shows it.
#[test]
fn the_report_holds_every_check() {
    let folder = Folder::new();
    let wrong = folder.write("wrong.toml", &with_sine_claim("1"));
    let page = folder.path("report.html");
    for (model, status) in [("models/twin_orchards.toml", 0), (wrong.as_str(), 1)] {
        let ran = run(&[
            "verify", model, "--report", &page, "--format", "json", "--paths", "20000",
        ]);
        assert_eq!(ran.status, status, "{model}: {}", ran.err);
        let found: Value = serde_json::from_str(&ran.out).expect("JSON");
        let checks = found["checks"].as_array().expect("a list").len();
        let text = std::fs::read_to_string(&page).expect("the report");
        let html = scraper::Html::parse_document(&text);
        assert!(html.errors.is_empty(), "{model}: {:?}", html.errors);
        let count = |selector: &str| {
            let selector = scraper::Selector::parse(selector).expect("a selector");
            html.select(&selector).count()
        };
        assert_eq!(count("circle"), checks, "{model}");
        assert_eq!(count("circle.bad") > 0, status == 1, "{model}");
        assert_eq!(count("strong.bad") > 0, status == 1, "{model}");
    }
    let two = run(&[
        "verify",
        "models/orchard_spot.toml",
        "models/orchard_spot.toml",
        "--report",
        &page,
    ]);
    assert_eq!(two.status, 2, "one page is of one model");
}
