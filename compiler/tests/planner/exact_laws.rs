//! Verdicts on the catalogue of equations in `tests/reference/exact.toml`: what is exact is found, with the
//! law that the catalogue gives; what is not is never called exact.

use std::collections::BTreeMap;

use crate::catalogue::{Sde, catalogue, formula};
use crate::support::{Planned, plan};
use driftwright::analysis::moments::Moments;
use driftwright::calculus;
use driftwright::front::formula::parse_in_pool;
use driftwright::model::Parameter;
use driftwright::scheme::{Becomes, Group, LinearGaussian, Method};
use driftwright::symbolic::{Expr, Symbol};

/// Exact laws of the catalogue that are not drawn exactly yet: a transform of several states at once.
const LATER: [&str; 1] = ["pub-044"];

/// Whether every state is stepped by an exact law.
fn is_exact(planned: &Planned) -> bool {
    planned.plan.groups.iter().all(Group::is_exact)
}

/// The default values of the parameters, by symbol.
fn parameters(planned: &Planned) -> BTreeMap<Symbol, f64> {
    let pool = &planned.model.pool;
    let value = |p: &Parameter| {
        let number = pool.number(p.value.clone().unwrap());
        (p.symbol, pool.eval_f64(number, &BTreeMap::new()).unwrap())
    };
    planned.model.parameters.iter().map(value).collect()
}

fn in_scope() -> impl Iterator<Item = Sde> {
    let exact = |s: &Sde| s.entry["expect"]["verdict"].as_str() == Some("exact");
    catalogue()
        .into_iter()
        .filter(move |s| exact(s) && !LATER.contains(&s.id.as_str()))
}

fn gaussian() -> impl Iterator<Item = Sde> {
    in_scope().filter(|s| s.class != "cir" && s.class != FLOW && !is_random_drift(s))
}

/// The class of commuting linear flows.
const FLOW: &str = "commuting-linear";

/// Whether an entry is a Brownian motion with a random drift, or its distance from the start.
fn is_random_drift(sde: &Sde) -> bool {
    sde.class.starts_with("benes-")
}

#[test]
fn what_is_exact_is_found_and_nothing_else_is_called_exact() {
    for sde in catalogue() {
        let planned = plan(&sde.text());
        let expected = sde.entry["expect"]["verdict"].as_str() == Some("exact")
            && !LATER.contains(&sde.id.as_str());
        let said: Vec<_> = planned.plan.groups.iter().map(|g| &g.reasons).collect();
        assert_eq!(is_exact(&planned), expected, "{}: {said:#?}", sde.id);
    }
}

#[test]
fn the_class_is_the_catalogues() {
    for sde in in_scope() {
        let planned = plan(&sde.text());
        let [group] = &planned.plan.groups[..] else {
            panic!("{}: several groups", sde.id)
        };
        let expected = match sde.class.as_str() {
            "abm" => Becomes::ArithmeticBrownianMotion,
            "ou" => Becomes::OrnsteinUhlenbeck,
            "lingauss" => Becomes::LinearGaussianSystem,
            "cir" => Becomes::SquareRoot,
            "benes-tanh" => Becomes::RandomDrift,
            "benes-coth" => Becomes::BesselWithDrift,
            FLOW => Becomes::LinearFlow,
            other => panic!("{}: class {other}", sde.id),
        };
        assert_eq!(group.becomes, Some(expected), "{}", sde.id);
        if expected == Becomes::SquareRoot || is_random_drift(&sde) {
            assert!(planned.plan.noise.components.is_empty(), "{}", sde.id);
            continue;
        }
        if expected == Becomes::LinearFlow {
            continue;
        }
        let sources: Vec<_> = planned
            .plan
            .noise
            .components
            .iter()
            .map(|c| &c.source)
            .collect();
        assert_eq!(sources.len(), group.states.len(), "{}: {sources:?}", sde.id);
    }
}

/// `u = scale*y + shift` between our coordinate and the catalogue's, which is unique only up to that.
fn affine(planned: &Planned, sde: &Sde, state: usize) -> (f64, f64) {
    let (pool, declared) = (&planned.model.pool, &planned.model.states[state]);
    let theirs = sde.entry["expect"]["transform"][&declared.name]
        .as_str()
        .unwrap();
    let theirs = parse_in_pool(pool, &formula(theirs)).unwrap();
    let ours = planned.plan.coordinates[state].forward;
    let (d_ours, d_theirs) = (
        pool.derivative(ours, declared.symbol),
        pool.derivative(theirs, declared.symbol),
    );
    let ratio = pool.derivative(pool.div(d_ours, d_theirs), declared.symbol);
    assert!(
        pool.is_zero(ratio).is_yes(),
        "{}: another transform",
        sde.id
    );
    let x0 = sde.entry["x0"][&declared.name].as_float().unwrap();
    let mut values = parameters(planned);
    values.insert(declared.symbol, x0);
    let at = |e: Expr| pool.eval_f64(e, &values).unwrap();
    let scale = at(d_ours) / at(d_theirs);
    (scale, at(ours) - scale * at(theirs))
}

fn system(planned: &Planned) -> &LinearGaussian {
    match &planned.plan.groups[0].method {
        Method::LinearGaussian(system) => system,
        other => panic!("not a linear Gaussian system: {other:?}"),
    }
}

fn close(left: f64, right: f64, what: &str) {
    let scale = left.abs().max(right.abs()).max(1.0);
    assert!(
        (left - right).abs() < 1e-12 * scale,
        "{what}: {left} against {right}"
    );
}

/// Mean and variance at a horizon of `dY = (alpha + a Y) dt + c dW` by the classical Runge-Kutta scheme
/// on `m' = a m + alpha`, `v' = 2 a v + c^2` (Arnold 1974, section 8.2).
fn integrate(coefficients: impl Fn(f64) -> [f64; 3], start: f64, horizon: f64) -> (f64, f64) {
    const STEPS: usize = 4000;
    let h = horizon / STEPS as f64;
    let slope = |t: f64, [m, v]: [f64; 2]| {
        let [a, alpha, c] = coefficients(t);
        [a * m + alpha, 2.0 * a * v + c * c]
    };
    let moved = |y: [f64; 2], k: [f64; 2], h: f64| [y[0] + h * k[0], y[1] + h * k[1]];
    let mut y = [start, 0.0];
    for step in 0..STEPS {
        let t = step as f64 * h;
        let first = slope(t, y);
        let second = slope(t + 0.5 * h, moved(y, first, 0.5 * h));
        let third = slope(t + 0.5 * h, moved(y, second, 0.5 * h));
        let fourth = slope(t + h, moved(y, third, h));
        for i in 0..2 {
            y[i] += h / 6.0 * (first[i] + 2.0 * second[i] + 2.0 * third[i] + fourth[i]);
        }
    }
    (y[0], y[1])
}

/// Mean and variance of the coordinate at the horizon, from our coefficients, against the catalogue's.
#[test]
fn scalar_coefficients_give_the_catalogues_law() {
    let mut checked = 0;
    for sde in gaussian().filter(|s| s.states().len() == 1) {
        let planned = plan(&sde.text());
        let (scale, shift) = affine(&planned, &sde, 0);
        let pool = &planned.model.pool;
        let mut values = parameters(&planned);
        let state = &planned.model.states[0];
        values.insert(
            state.symbol,
            sde.entry["x0"][&state.name].as_float().unwrap(),
        );
        let linear = system(&planned);
        let coefficients = [linear.a[0][0], linear.alpha[0], linear.c[0][0]];
        let at = |time: f64, e: Expr| {
            let mut values = values.clone();
            values.insert(planned.model.time, time);
            pool.eval_f64(e, &values).unwrap()
        };
        let u0 = at(0.0, planned.plan.coordinates[0].forward);
        let horizon = sde.entry["T"].as_float().unwrap();
        let (mean, variance) = integrate(|time| coefficients.map(|e| at(time, e)), u0, horizon);
        let number = |key: &str| {
            sde.entry["law"][key]
                .as_str()
                .unwrap()
                .parse::<f64>()
                .unwrap()
        };
        close(
            mean,
            scale * number("ymean") + shift,
            &format!("{} mean", sde.id),
        );
        close(
            variance,
            scale * scale * number("yvar"),
            &format!("{} variance", sde.id),
        );
        checked += 1;
    }
    assert_eq!(checked, 25);
}

#[test]
fn coefficients_of_systems_are_the_catalogues() {
    let mut checked = 0;
    for sde in gaussian().filter(|s| s.states().len() > 1) {
        let planned = plan(&sde.text());
        let (pool, linear) = (&planned.model.pool, system(&planned));
        for i in 0..sde.states().len() {
            assert_eq!(affine(&planned, &sde, i), (1.0, 0.0), "{}", sde.id);
        }
        let Some(expected) = sde.entry["expect"].get("linear") else {
            continue;
        };
        let same = |ours: Expr, theirs: &toml::Value| {
            let theirs = parse_in_pool(pool, theirs.as_str().unwrap()).unwrap();
            assert!(
                pool.equal(ours, theirs).is_yes(),
                "{}: {}",
                sde.id,
                pool.format(ours)
            );
        };
        for (i, row) in linear.a.iter().enumerate() {
            same(linear.alpha[i], &expected["alpha"][i]);
            row.iter()
                .enumerate()
                .for_each(|(j, &entry)| same(entry, &expected["A"][i][j]));
        }
        checked += 1;
    }
    assert_eq!(checked, 8);
}

/// The transition of each square-root process against the catalogue's: degrees of freedom and
/// noncentrality, and the distribution function of the state at its three points.
#[test]
fn square_root_laws_are_the_catalogues() {
    let mut checked = 0;
    for sde in in_scope().filter(|s| s.class == "cir") {
        let planned = plan(&sde.text());
        let Method::SquareRoot(step) = &planned.plan.groups[0].method else {
            panic!("{}: not a square-root process", sde.id)
        };
        let law = &sde.entry["law"];
        let number = |v: &toml::Value| v.as_str().unwrap().parse::<f64>().unwrap();
        let values = parameters(&planned);
        let pool = &planned.model.pool;
        let dimension = pool.eval_f64(step.dimension, &values).unwrap();
        close(
            dimension,
            number(&law["delta"]),
            &format!("{} dimension", sde.id),
        );
        let dynamics = calculus::dynamics(&planned.model);
        let moments = Moments::new(&planned.model, &dynamics);
        let state = pool.var(planned.model.states[0].symbol);
        let marginal = moments.marginal_law(state).expect("a law");
        let horizon = sde.entry["T"].as_float().unwrap();
        for point in law["cdf"].as_array().unwrap() {
            let (x, p) = (number(&point[0]), number(&point[1]));
            let ours = moments.marginal_cdf(&marginal, x, &values, horizon);
            close(ours.unwrap(), p, &format!("{} at {x}", sde.id));
            checked += 1;
        }
        let numbers = [
            ("mean", moments.numeric_mean(state, &values, horizon)),
            ("var", moments.numeric_variance(state, &values, horizon)),
        ];
        for (key, ours) in numbers {
            let Some(ours) = ours else { continue };
            let theirs = number(&law[key][&planned.model.states[0].name]);
            close(ours, theirs, &format!("{} {key}", sde.id));
            checked += 1;
        }
        if let Some(atom) = law.get("atom") {
            let ours = moments.atom(&marginal, &values, horizon).unwrap();
            close(ours.mass, number(atom), &format!("{} atom", sde.id));
            checked += 1;
        }
    }
    // Moments where their equations close, in five entries.
    assert_eq!(checked, 8 * 3 + 1 + 5 * 2);
}

/// Mean, variance and distribution function of the laws with a random drift against the catalogue's.
#[test]
fn laws_with_a_random_drift_are_the_catalogues() {
    let mut checked = 0;
    for sde in in_scope().filter(is_random_drift) {
        let planned = plan(&sde.text());
        let pool = &planned.model.pool;
        let dynamics = calculus::dynamics(&planned.model);
        let moments = Moments::new(&planned.model, &dynamics);
        let (values, law) = (parameters(&planned), &sde.entry["law"]);
        let number = |v: &toml::Value| v.as_str().unwrap().parse::<f64>().unwrap();
        let horizon = sde.entry["T"].as_float().unwrap();
        let declared = &planned.model.states[0];
        let state = pool.var(declared.symbol);
        let mut at = values.clone();
        at.insert(planned.model.time, horizon);
        for (key, found) in [
            ("mean", moments.mean(state)),
            ("var", moments.variance(state)),
        ] {
            let ours = pool.eval_f64(found.unwrap().value, &at).unwrap();
            let theirs = number(&law[key][&declared.name]);
            close(ours, theirs, &format!("{} {key}", sde.id));
            checked += 1;
        }
        let marginal = moments.marginal_law(state).expect("a law");
        for point in law["cdf"].as_array().unwrap() {
            let (x, p) = (number(&point[0]), number(&point[1]));
            let ours = moments.marginal_cdf(&marginal, x, &values, horizon);
            close(ours.unwrap(), p, &format!("{} at {x}", sde.id));
            checked += 1;
        }
    }
    assert_eq!(checked, 2 * (2 + 3));
}

#[test]
fn a_small_cube_in_the_drift_turns_exactness_off() {
    for sde in in_scope() {
        let state = sde.states().remove(0);
        let drift = sde.entry["drift"][&state].as_str().unwrap();
        let moved = sde.with_drift(&state, &format!("{drift} + 1e-9*{state}^3"));
        assert!(!is_exact(&plan(&moved.text())), "{}", sde.id);
    }
}

/// Every coefficient of the noise of every entry in turn, times a factor whose exponent is moved from 0 by 1e-9.
#[test]
fn a_factor_with_a_small_exponent_turns_exactness_off() {
    let mut moved = 0;
    for sde in in_scope() {
        for state in sde.states() {
            let row = sde.entry["diffusion"][&state].as_table().unwrap().clone();
            for (driver, noise) in row {
                let noise = noise.as_str().unwrap();
                let outside = format!("({noise})*(1 + {state}^2)^1e-9");
                let outside = sde.with_diffusion(&state, &driver, &outside);
                assert!(!is_exact(&plan(&outside.text())), "{} {state}", sde.id);
                moved += 1;
            }
        }
    }
    assert!(moved > 44, "{moved}");
}

/// Time that runs faster by a constant leaves every entry in its class: drifts grow by the factor, noise by its root.
#[test]
fn a_small_change_of_the_clock_leaves_everything_exact() {
    for sde in in_scope() {
        let mut moved = sde.clone();
        for state in sde.states() {
            let drift = sde.entry["drift"][&state].as_str().unwrap();
            moved = moved.with_drift(&state, &format!("(1 + 1e-9)^2*({drift})"));
            let row = sde.entry["diffusion"][&state].as_table().unwrap().clone();
            for (driver, noise) in row {
                let noise = format!("(1 + 1e-9)*({})", noise.as_str().unwrap());
                moved = moved.with_diffusion(&state, &driver, &noise);
            }
        }
        let planned = plan(&moved.text());
        let said: Vec<_> = planned.plan.groups.iter().map(|g| &g.reasons).collect();
        assert!(is_exact(&planned), "{}: {said:#?}", sde.id);
    }
}

#[test]
fn a_small_change_of_exponent_turns_exactness_off() {
    let sdes: BTreeMap<String, Sde> = in_scope().map(|s| (s.id.clone(), s)).collect();
    for (id, state, driver, noise) in [
        ("pub-011", "S", "W", "sigma*S^(1 + 1e-9)"),
        ("pub-012", "S", "W", "c*sqrt(S)*S^(0.5 + 1e-9)"),
        ("pub-014", "x", "W", "s*(x + 1/2)^(1 - 1e-9)"),
        ("pub-015", "S", "W", "s*S^(1 - 1e-9)"),
        ("pub-018", "x", "W", "s*x*(1 - x)^(1 + 1e-9)"),
        ("pub-019", "x", "W", "be*(1 - x^2)^(1 + 1e-9)"),
        ("pub-021", "x", "W", "s*(1 + x^2)^(0.5 + 1e-9)"),
        ("pub-026", "r", "W", "sigma*r^(0.5 + 1e-9)"),
        ("pub-027", "v", "W", "c*v^(1/2 - 1e-9)"),
        ("pub-028", "x", "W", "2*x^(0.5 + 1e-9)"),
        ("pub-029", "x", "W", "x^1e-9"),
        ("pub-030", "v", "W", "c*v^1e-9"),
        ("pub-031", "v", "W", "s*v^(3/2 + 1e-9)"),
        ("pub-033", "x", "W", "s*(1 + t/2)*x^(0.5 + 1e-9)"),
        ("pub-033", "x", "W", "s*(1 + t/2)*(1 + 1e-9*t)*sqrt(x)"),
        ("pub-034", "x", "W", "1 + 1e-9"),
        ("pub-035", "x", "W", "1 + 1e-9*x"),
        ("pub-045", "x", "W", "-s*y + 1e-9*x*y"),
        ("pub-037", "S", "W1", "s*S^(1 + 1e-9)"),
        ("pub-043", "G", "W2", "s2*G^(1 - 1e-9)"),
        ("pub-013", "S", "W", "s0*exp(-l*t)*S^(1 + 1e-9)"),
        ("pub-017", "r", "W", "s*r^(1 - 1e-9)"),
    ] {
        let moved = sdes[id].with_diffusion(state, driver, noise);
        assert!(!is_exact(&plan(&moved.text())), "{id}");
    }
}

#[test]
fn a_small_change_inside_the_class_leaves_it_exact() {
    let sdes: BTreeMap<String, Sde> = in_scope().map(|s| (s.id.clone(), s)).collect();
    for (id, state, more) in [
        ("pub-001", "x", "1e-9*x"),
        ("pub-004", "x", "1e-9*x"),
        ("pub-011", "S", "1e-9*S*log(S)"),
        ("pub-014", "x", "1e-9*(x + 1/2)"),
        ("pub-018", "x", "1e-9*x*(1 - x)"),
        ("pub-022", "x", "1e-9*sqrt(1 + x^2)"),
        ("pub-026", "r", "1e-9*r"),
        ("pub-027", "v", "1e-9"),
        ("pub-028", "x", "1e-9*x"),
        ("pub-029", "x", "1e-9*x"),
        ("pub-030", "v", "1e-9/v"),
        ("pub-031", "v", "-1e-9*v^2"),
        ("pub-032", "x", "1e-9*x"),
        ("pub-033", "x", "1e-9*sin(t)*x"),
        (
            "pub-035",
            "x",
            "-mu/tanh(mu*x) + (mu + 1e-9)/tanh((mu + 1e-9)*x)",
        ),
        ("pub-038", "B", "1e-9*B*log(B)"),
        ("pub-041", "q", "1e-9*q"),
        ("pub-003", "x", "1e-9*t*x"),
        ("pub-007", "x", "1e-9*exp(t)*x"),
        ("pub-013", "S", "1e-9*sin(t)*S*log(S)"),
    ] {
        let drift = sdes[id].entry["drift"][state].as_str().unwrap();
        let moved = sdes[id].with_drift(state, &format!("{drift} + {more}"));
        assert!(is_exact(&plan(&moved.text())), "{id}");
    }
}
