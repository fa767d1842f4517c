//! Moments against `tests/reference/D.toml`: conditional moments to order 4 of seventeen polynomial
//! processes, from the generator on monomials (Cuchiero, Keller-Ressel and Teichmann 2012) by matrix
//! exponentials at 60 digits, confirmed by integration of the moment equations. The numeric moments
//! are held for every process, the closed forms wherever one is found.

use std::collections::{BTreeMap, BTreeSet};

use driftwright::pipeline::Compiled;
use driftwright::symbolic::{Big, Expr, Limit, Symbol};
use serde::Deserialize;

use crate::common::{Equations, Shape, close, compile_text, compiled};

#[derive(Debug, Deserialize)]
struct Reference {
    case: Vec<Case>,
}

#[derive(Debug, Deserialize)]
struct Case {
    id: String,
    #[serde(flatten)]
    equations: Equations,
    correlation: Vec<Vec<String>>,
    x0: Vec<f64>,
    t: f64,
    check: Vec<Check>,
}

#[derive(Debug, Deserialize)]
struct Check {
    quantity: String,
    value: f64,
    rel_tol: f64,
    abs_tol: f64,
    exponents: Option<Vec<u32>>,
}

/// Processes whose moment equations can be put in a triangular order, so that closed forms are due;
/// in the other one the states drive each other.
const COUPLED: &str = "D-linear-noncommuting-t1";

fn cases() -> Vec<Case> {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/../tests/reference/D.toml");
    let text = std::fs::read_to_string(path).expect("the reference file is there");
    toml::from_str::<Reference>(&text)
        .expect("it can be read")
        .case
}

impl Case {
    /// The model: domains and ranges as the process needs them; the reference states them in words.
    fn compiled(&self) -> Compiled {
        let closed = |state: &str, domain: &str| {
            let edge = "at_edge = \"as_equation\"";
            BTreeMap::from([(state.to_owned(), format!("domain = \"{domain}\"\n{edge}"))])
        };
        let family = self.id.rsplit_once("-t").expect("ids end in the time").0;
        let (domains, signed): (_, &[&str]) = match family {
            "D-square-root" => (closed("X", "[0, inf)"), &[]),
            "D-cir-integral" => (closed("X", "[0, inf)"), &["I"]),
            "D-sqrt-var-logprice" => (closed("V", "[0, inf)"), &["Y", "rho"]),
            "D-jacobi" => (closed("X", "[0, 1]"), &[]),
            "D-jacobi-rho" => (closed("R", "[-1, 1]"), &[]),
            "D-affine-gbm" | "D-gbm-pair" => (BTreeMap::new(), &["rho"]),
            _ => (BTreeMap::new(), &["X", "Y", "Z", "rho", "a1"]),
        };
        let mut correlation = Vec::new();
        for (i, row) in self.correlation.iter().enumerate() {
            for (j, rho) in row
                .iter()
                .enumerate()
                .skip(i + 1)
                .filter(|(_, rho)| *rho != "0")
            {
                correlation.push((i + 1, j + 1, rho.clone()));
            }
        }
        let ranges = match family {
            "D-jacobi" => BTreeMap::from([("theta".to_owned(), "(0, 1)".to_owned())]),
            "D-jacobi-rho" => BTreeMap::from([("theta".to_owned(), "(-1, 1)".to_owned())]),
            "D-gbm-pair" => BTreeMap::from([("m2".to_owned(), "(-inf, inf)".to_owned())]),
            _ => BTreeMap::new(),
        };
        compiled(&self.equations.text(&Shape {
            calculus: "ito",
            correlation,
            signed: signed.iter().map(|&s| s.to_owned()).collect(),
            initial: self.x0.clone(),
            domains,
            ranges,
            rest: String::new(),
        }))
    }

    /// The formulas of a check: one for a mean or central moment, two for a covariance.
    fn formulas(&self, compiled: &Compiled, check: &Check) -> Vec<Expr> {
        let pool = &compiled.model.pool;
        let states: Vec<Expr> = compiled
            .model
            .states
            .iter()
            .map(|s| pool.var(s.symbol))
            .collect();
        if let Some(exponents) = &check.exponents {
            let power = |(&x, &n): (&Expr, &u32)| pool.pow(x, pool.int(i64::from(n)));
            return vec![pool.product(states.iter().zip(exponents).map(power))];
        }
        match check.quantity.split_once('(') {
            Some((_, name)) => {
                let symbol = pool
                    .find_symbol(name.trim_end_matches(')'))
                    .expect("a state");
                vec![pool.var(symbol)]
            }
            None => states,
        }
    }
}

fn parameters(compiled: &Compiled, case: &Case) -> BTreeMap<Symbol, f64> {
    let pool = &compiled.model.pool;
    case.equations
        .params
        .iter()
        .map(|(name, &value)| (pool.find_symbol(name).expect("a parameter"), value))
        .collect()
}

/// A closed form at 256 bits, so that cancellation is no excuse.
fn high_precision(
    compiled: &Compiled,
    e: Expr,
    values: &BTreeMap<Symbol, f64>,
    t: f64,
) -> Option<f64> {
    let big = |value: f64| {
        Big::try_from(value)
            .expect("finite")
            .with_precision(256)
            .value()
    };
    let mut at: BTreeMap<Symbol, Big> = values.iter().map(|(&s, &v)| (s, big(v))).collect();
    at.insert(compiled.model.time, big(t));
    Some(compiled.model.pool.eval_big(e, &at)?.to_f64().value())
}

#[test]
fn numeric_moments_are_the_reference_moments() {
    let mut failures = Vec::new();
    for case in cases() {
        let compiled = case.compiled();
        let (moments, pool) = (&compiled.moments, &compiled.model.pool);
        let values = parameters(&compiled, &case);
        let mean = |e: Expr| moments.numeric_mean(e, &values, case.t);
        for check in &case.check {
            let formulas = case.formulas(&compiled, check);
            let central = |order: i64| {
                let centre = mean(formulas[0])?;
                let centre = pool.number(centre.try_into().ok()?);
                mean(pool.pow(pool.sub(formulas[0], centre), pool.int(order)))
            };
            let got = match check.quantity.as_str() {
                "cov" => moments.numeric_covariance(formulas[0], formulas[1], &values, case.t),
                "skew" => central(3).zip(central(2)).map(|(m3, m2)| m3 / m2.powf(1.5)),
                "ex_kurt" => central(4)
                    .zip(central(2))
                    .map(|(m4, m2)| m4 / (m2 * m2) - 3.0),
                name if name.starts_with("var") => {
                    moments.numeric_variance(formulas[0], &values, case.t)
                }
                _ => mean(formulas[0]),
            };
            let near = |got: f64| close(got, check.value, check.rel_tol, check.abs_tol);
            if !got.is_some_and(near) {
                failures.push(format!(
                    "{} {}: {got:?}, not {}",
                    case.id, check.quantity, check.value
                ));
            }
        }
    }
    assert!(
        failures.is_empty(),
        "{} failures:\n{}",
        failures.len(),
        failures.join("\n")
    );
}

#[test]
fn closed_forms_are_the_reference_moments() {
    let mut failures = Vec::new();
    let mut found = BTreeSet::new();
    for case in cases() {
        let compiled = case.compiled();
        let moments = &compiled.moments;
        let values = parameters(&compiled, &case);
        for check in &case.check {
            let order = check
                .exponents
                .as_ref()
                .map_or(2, |e| e.iter().sum::<u32>());
            // Higher moments of several states are held as numbers: their closed forms fill pages.
            if order > 2 && case.equations.states.len() > 1 {
                continue;
            }
            let formulas = case.formulas(&compiled, check);
            let moment = match check.quantity.as_str() {
                "cov" => moments.covariance(formulas[0], formulas[1]),
                "skew" | "ex_kurt" => continue,
                name if name.starts_with("var") => moments.variance(formulas[0]),
                _ => moments.mean(formulas[0]),
            };
            let Some(moment) = moment else {
                if case.id != COUPLED && order <= 2 {
                    failures.push(format!("{} {}: no closed form", case.id, check.quantity));
                }
                continue;
            };
            found.insert((case.id.clone(), check.quantity.clone()));
            let got = high_precision(&compiled, moment.value, &values, case.t);
            let near = |got: f64| close(got, check.value, check.rel_tol, check.abs_tol);
            if !got.is_some_and(near) {
                let formula = compiled.model.pool.format(moment.value);
                let what = format!("{} {}: {got:?}", case.id, check.quantity);
                failures.push(format!("{what}, not {}, from {formula}", check.value));
            }
        }
    }
    assert!(
        failures.is_empty(),
        "{} failures:\n{}",
        failures.len(),
        failures.join("\n")
    );
    assert!(
        found.len() > 90,
        "only {} closed forms were found",
        found.len()
    );
}

/// Equal rates and rates of zero are removable singularities: the numbers go through them.
#[test]
fn numbers_have_no_removable_singularities() {
    let text = "
[model]
name = \"pair\"
drivers = [\"W\"]
[parameters]
a = { value = 1, range = \"[0, inf)\" }
b = { value = 1, range = \"[0, inf)\" }
[states.X]
initial = \"1\"
drift = \"-a*X\"
diffusion = \"1\"
[states.Y]
initial = \"0\"
drift = \"X - b*Y\"
";
    let compiled = compiled(text);
    let (pool, moments) = (&compiled.model.pool, &compiled.moments);
    let symbol = |name: &str| pool.find_symbol(name).expect("declared");
    let values = |a: f64, b: f64| BTreeMap::from([(symbol("a"), a), (symbol("b"), b)]);
    let (x, y) = (pool.var(symbol("X")), pool.var(symbol("Y")));
    // E[Y] = t exp(-a t) for a = b and X0 = 1, by variation of constants.
    let mean = moments
        .numeric_mean(y, &values(1.0, 1.0), 2.0)
        .expect("the moments close");
    assert!(close(mean, 2.0 * (-2.0_f64).exp(), 1e-14, 0.0), "{mean}");
    // Var[X] = t and Var[Y] = t^3/3 for a = b = 0.
    let variance = moments
        .numeric_variance(x, &values(0.0, 0.0), 3.0)
        .expect("they close");
    assert!(close(variance, 3.0, 1e-13, 0.0), "{variance}");
    let variance = moments
        .numeric_variance(y, &values(0.0, 0.0), 3.0)
        .expect("they close");
    assert!(close(variance, 9.0, 1e-13, 0.0), "{variance}");
}

/// No moment is returned where the process may leave its domain, explode, or be a strict local
/// martingale: the equations alone would give wrong values.
#[test]
fn moments_are_not_guessed() {
    let cases = [
        // The reciprocal of a three-dimensional Bessel process is a strict local martingale.
        ("X^2", "0", "(0, inf)", ""),
        // Reflected Brownian motion: E[X] is not X0.
        ("1", "0", "[0, inf)", "at_edge = \"reflect\""),
        // Absorbed Brownian motion: E[X^2] is not X0^2 + t.
        ("1", "0", "[0, inf)", "at_edge = \"absorb\""),
        // Absorbed although the drift would lead away from the end.
        ("sqrt(X)", "1/4", "[0, inf)", "at_edge = \"absorb\""),
        // Explosion in finite time.
        ("0", "X^2", "(0, inf)", ""),
    ];
    for (diffusion, drift, domain, edge) in cases {
        let text = format!(
            "[model]\nname = \"case\"\ndrivers = [\"W\"]\n[states.X]\ninitial = \"1\"\n\
             drift = \"{drift}\"\ndiffusion = \"{diffusion}\"\ndomain = \"{domain}\"\n{edge}\n"
        );
        let (compiled, shown) = compile_text(&text);
        let compiled = compiled.unwrap_or_else(|| panic!("{text}\n{shown}"));
        let (pool, moments) = (&compiled.model.pool, &compiled.moments);
        let x = pool.var(compiled.model.states[0].symbol);
        assert_eq!(moments.mean(x), None, "{text}");
        assert_eq!(moments.variance(x), None, "{text}");
        assert_eq!(
            moments.numeric_mean(x, &BTreeMap::new(), 1.0),
            None,
            "{text}"
        );
    }
}

/// A moment whose equations need a chain of more functions than the budget grants stays open, and says so;
/// a low one of the same process is proved.
#[test]
fn a_moment_beyond_the_budget_stays_open_and_says_why() {
    let model = "[model]\nname = \"reverting\"\ndrivers = [\"W\"]\n[parameters]\nk = 1\nm = 0.5\ns = 0.3\n\
                 [states.X]\ninitial = \"m\"\ndrift = \"k*(m - X)\"\ndiffusion = \"s*X\"\n[claims]\n\
                 low = { mean_of = \"X\", is = \"m\" }\nhigh = { mean_of = \"X^60\", is = \"1\" }\n";
    let compiled = compiled(model);
    let [low, high] = &compiled.claims[..] else {
        panic!("two claims")
    };
    assert_eq!(
        (low.verdict.name(), high.verdict.name()),
        ("proved", "open")
    );
    assert!(compiled.model.pool.exceeded().contains(&Limit::Moments));
    let named = Limit::Moments.to_string();
    assert!(high.reason.contains(&named), "{}", high.reason);
}

/// So does one whose functions are few, but whose formula would have tens of thousands of terms: it is given
/// up before the zero test is asked about it.
#[test]
fn a_moment_of_too_many_terms_stays_open_and_says_why() {
    let model = "[model]\nname = \"cascade\"\n[parameters]\na = 0.7\nb = 0.3\n\
                 [states.Y]\ninitial = \"0.2\"\ndrift = \"a*(1/2 - Y)\"\n\
                 [states.Z]\ninitial = \"0.1\"\ndrift = \"b*Y - 100*Z\"\n[claims]\n\
                 wide = { variance_of = \"((Z)*(Z))^5\", is = \"1\" }\n";
    let compiled = compiled(model);
    let [wide] = &compiled.claims[..] else {
        panic!("one claim")
    };
    assert_eq!(wide.verdict.name(), "open");
    assert_eq!(compiled.model.pool.exceeded(), [Limit::Moments]);
    let named = Limit::Moments.to_string();
    assert!(wide.reason.contains(&named), "{}", wide.reason);
}
