//! Ito's rule and the Stratonovich conversion against `tests/reference/F.toml`: formulas that were
//! worked out with a computer algebra system and checked by finite differences of the generator.
//! The source of each case stands in its entry.

use std::collections::BTreeMap;

use crate::common::{Equations, Shape, at, close, compiled, derived};
use driftwright::calculus::{Expansion, System};
use driftwright::pipeline::Compiled;
use driftwright::symbolic::Expr;
use serde::Deserialize;

#[derive(Debug, Deserialize)]
struct Reference {
    case: Vec<Case>,
}

#[derive(Debug, Deserialize)]
struct Case {
    id: String,
    kind: String,
    #[serde(flatten)]
    equations: Equations,
    #[serde(default)]
    correlation_entries: Vec<(usize, usize, String)>,
    #[serde(default)]
    signed: Vec<String>,
    function: Option<String>,
    expected_drift: OneOrMore,
    expected_diffusion: Option<toml::Value>,
    rel_tol: f64,
    #[serde(default)]
    points: Vec<Point>,
}

#[derive(Debug, Deserialize)]
#[serde(untagged)]
enum OneOrMore {
    One(String),
    More(Vec<String>),
}

#[derive(Debug, Deserialize)]
struct Point {
    at: BTreeMap<String, f64>,
    drift: Numbers,
    #[serde(default)]
    diffusion: Vec<f64>,
}

#[derive(Debug, Deserialize)]
#[serde(untagged)]
enum Numbers {
    One(f64),
    More(Vec<f64>),
}

impl Numbers {
    fn get(&self, i: usize) -> f64 {
        match self {
            Self::One(value) => *value,
            Self::More(values) => values[i],
        }
    }
}

fn cases(kind: &str) -> Vec<Case> {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/../tests/reference/F.toml");
    let text = std::fs::read_to_string(path).expect("the reference file is there");
    let reference: Reference = toml::from_str(&text).expect("it can be read");
    reference
        .case
        .into_iter()
        .filter(|c| c.kind == kind)
        .collect()
}

impl Case {
    fn shape(&self, calculus: &'static str) -> Shape {
        Shape {
            calculus,
            correlation: self.correlation_entries.clone(),
            signed: self.signed.clone(),
            // Shares live between 0 and 1.
            domains: match self.id.as_str() {
                "F-lamperti-jacobi" | "F-logit" => {
                    BTreeMap::from([("X".to_owned(), "domain = \"(0, 1)\"".to_owned())])
                }
                _ => BTreeMap::new(),
            },
            initial: vec![0.5; self.equations.states.len()],
            ..Shape::default()
        }
    }
}

/// Whether two formulas are equal by normal form.
fn proved_equal(compiled: &Compiled, a: Expr, b: Expr) -> bool {
    compiled.model.pool.equal(a, b).is_yes()
}

fn show(compiled: &Compiled, e: Expr) -> String {
    compiled.model.pool.format(e)
}

#[test]
fn itos_rule_gives_the_reference_drifts_and_diffusions() {
    let mut failures = Vec::new();
    for case in cases("ito") {
        let OneOrMore::One(drift) = &case.expected_drift else {
            panic!("{}: one drift", case.id)
        };
        let diffusion: Vec<String> = case
            .expected_diffusion
            .clone()
            .unwrap()
            .try_into()
            .expect("one formula per driver");
        let mut rest = format!(
            "[derived.z_]\nformula = \"{}\"\n",
            case.function.as_ref().expect("a function")
        );
        rest += &format!("[derived.want_a]\nformula = \"{drift}\"\n");
        for (j, b) in diffusion.iter().enumerate() {
            rest += &format!("[derived.want_b{j}]\nformula = \"{b}\"\n");
        }
        let compiled = compiled(&case.equations.text(&Shape {
            rest,
            ..case.shape("ito")
        }));
        let expansion = &compiled.dynamics.derived[0];
        let mut same = |what: &str, got: Expr, want: Expr| {
            if !proved_equal(&compiled, got, want) {
                let (got, want) = (show(&compiled, got), show(&compiled, want));
                failures.push(format!(
                    "{} {what}: {got} is not proved equal to {want}",
                    case.id
                ));
            }
        };
        same("drift", expansion.drift, derived(&compiled, "want_a"));
        let pool = &compiled.model.pool;
        let sum = pool.add(expansion.chain_rule_drift, expansion.ito_correction);
        same("sum of the parts", sum, expansion.drift);
        for j in 0..diffusion.len() {
            let want = derived(&compiled, &format!("want_b{j}"));
            same("diffusion", expansion.diffusion[j], want);
        }
        let system = System::of(&compiled.model, &compiled.dynamics);
        let generator = system.generator(expansion.formula);
        same("generator", generator, expansion.drift);
        let noise = system.noise(expansion.formula);
        assert_eq!(noise.len(), expansion.diffusion.len(), "{}", case.id);
        for (got, want) in noise.into_iter().zip(&expansion.diffusion) {
            same("noise", got, *want);
        }
        failures.extend(at_points(&case, &compiled, expansion));
    }
    assert!(
        failures.is_empty(),
        "{} failures:\n{}",
        failures.len(),
        failures.join("\n")
    );
}

fn at_points(case: &Case, compiled: &Compiled, expansion: &Expansion) -> Vec<String> {
    let pool = &compiled.model.pool;
    let mut failures = Vec::new();
    for point in &case.points {
        let values = at(compiled, &point.at);
        let mut check = |what: &str, e: Expr, want: f64| {
            let got = pool.eval_f64(e, &values);
            // Terms of order one may cancel in the drift: hence the absolute part.
            if !got.is_some_and(|got| close(got, want, case.rel_tol, 1e-12)) {
                failures.push(format!(
                    "{} {what}: {got:?} is not {want} at {:?}",
                    case.id, point.at
                ));
            }
        };
        check("drift", expansion.drift, point.drift.get(0));
        for (j, &want) in point.diffusion.iter().enumerate() {
            check("diffusion", expansion.diffusion[j], want);
        }
    }
    failures
}

#[test]
fn stratonovich_models_get_the_reference_ito_drifts() {
    let mut failures = Vec::new();
    for case in cases("strat_to_ito") {
        let OneOrMore::More(expected) = &case.expected_drift else {
            panic!("{}", case.id)
        };
        failures.extend(converts(&case, &case.equations, expected, true));
    }
    // The other way round: the Stratonovich drifts that the reference derives from an Ito model must
    // convert back to the drifts of that model.
    for case in cases("ito_to_strat") {
        let OneOrMore::More(stratonovich) = &case.expected_drift else {
            panic!("{}", case.id)
        };
        let mut equations = case.equations.clone();
        equations.drift.clone_from(stratonovich);
        failures.extend(converts(&case, &equations, &case.equations.drift, false));
    }
    assert!(
        failures.is_empty(),
        "{} failures:\n{}",
        failures.len(),
        failures.join("\n")
    );
}

fn converts(
    case: &Case,
    equations: &Equations,
    expected: &[String],
    with_points: bool,
) -> Vec<String> {
    let mut rest = String::new();
    for (i, drift) in expected.iter().enumerate() {
        rest += &format!("[derived.want_a{i}]\nformula = \"{drift}\"\n");
    }
    let compiled = compiled(&equations.text(&Shape {
        rest,
        ..case.shape("stratonovich")
    }));
    let pool = &compiled.model.pool;
    let mut failures = Vec::new();
    for (i, process) in compiled.dynamics.states.iter().enumerate() {
        let want = derived(&compiled, &format!("want_a{i}"));
        if !proved_equal(&compiled, process.drift, want) {
            let (got, want) = (show(&compiled, process.drift), show(&compiled, want));
            failures.push(format!("{}: {got} is not proved equal to {want}", case.id));
        }
        assert!(
            !compiled.dynamics.conversion[i].steps.is_empty(),
            "{}: no working",
            case.id
        );
        for point in case.points.iter().filter(|_| with_points) {
            let got = pool.eval_f64(process.drift, &at(&compiled, &point.at));
            let want = point.drift.get(i);
            if !got.is_some_and(|got| close(got, want, case.rel_tol, 1e-12)) {
                failures.push(format!("{}: {got:?} is not {want}", case.id));
            }
        }
    }
    failures
}

/// The twin: with the second-order part lost, the same comparison must fail.
#[test]
fn a_lost_correction_is_seen() {
    let mut seen = 0;
    for case in cases("ito") {
        let OneOrMore::One(drift) = &case.expected_drift else {
            panic!("{}", case.id)
        };
        let rest = format!(
            "[derived.z_]\nformula = \"{}\"\n[derived.want_a]\nformula = \"{drift}\"\n",
            case.function.as_ref().expect("a function")
        );
        let compiled = compiled(&case.equations.text(&Shape {
            rest,
            ..case.shape("ito")
        }));
        let expansion = &compiled.dynamics.derived[0];
        let pool = &compiled.model.pool;
        if pool.is_zero(expansion.ito_correction).is_yes() {
            continue;
        }
        let want = derived(&compiled, "want_a");
        assert!(
            pool.equal(expansion.chain_rule_drift, want).is_no(),
            "{}",
            case.id
        );
        seen += 1;
    }
    assert!(seen > 30, "only {seen} cases have a correction");
}

/// Where the factors of a sum are over the budget of divisions, the sum is left as it is: the noise is F' times the state's
/// noise, by the definition of both.
#[test]
fn the_noise_of_a_formula_that_is_too_long_to_factor() {
    let formula = "asinh((1 + atanh(sin(x)/2)^2)^(sigma*x))";
    let compiled = compiled(&format!(
        "[model]\nname = \"m\"\ndrivers = [\"W\"]\n[parameters]\nmu = {{ value = 0.4, range = \"[-1, 1]\" }}\n\
         sigma = {{ value = 0.7, range = \"[0, 1.5]\" }}\n[states.x]\ninitial = \"0.5\"\ndrift = \"mu*sin(t) - x\"\n\
         diffusion = \"sigma*x\"\ndomain = \"[0, 3]\"\nat_edge = \"reflect\"\n[derived.F]\nformula = \"{formula}\"\n"
    ));
    let value = |x: f64| {
        let a = (x.sin() / 2.0).atanh();
        (0.7 * x * (1.0 + a * a).ln()).exp().asinh()
    };
    let (x, h) = (0.3, 1e-4);
    // The central difference of order 4.
    let slope = (8.0 * (value(x + h) - value(x - h)) - (value(x + 2.0 * h) - value(x - 2.0 * h)))
        / (12.0 * h);
    let values = [("x", x), ("sigma", 0.7), ("mu", 0.4), ("t", 0.2)];
    let values = values.map(|(name, value)| (name.to_owned(), value));
    let point = at(&compiled, &values.into());
    let noise = compiled.dynamics.derived[0].diffusion[0];
    let found = compiled
        .model
        .pool
        .eval_f64(noise, &point)
        .expect("a value");
    assert!(close(found, slope * 0.7 * x, 1e-9, 0.0), "{found}");
}
