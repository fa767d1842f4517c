//! Verdicts on the catalogue of equations in `tests/reference/exact.toml`: what is exact is found, with the
//! law that the catalogue gives; what is not is never called exact.

use std::collections::BTreeMap;

use crate::catalogue::{Sde, catalogue, formula};
use crate::support::{Planned, plan};
use driftwright::front::formula::parse_in_pool;
use driftwright::model::Parameter;
use driftwright::scheme::{Becomes, Group, LinearGaussian, Method};
use driftwright::symbolic::{Expr, Symbol};

/// Exact laws of the catalogue that are not drawn exactly yet: coefficients that depend on time,
/// square-root processes, mixtures, transforms of several states at once, rotations.
const LATER: [&str; 18] = [
    "pub-003", "pub-007", "pub-008", "pub-009", "pub-013", "pub-017", "pub-026", "pub-027",
    "pub-028", "pub-029", "pub-030", "pub-031", "pub-032", "pub-033", "pub-034", "pub-035",
    "pub-044", "pub-045",
];

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
            other => panic!("{}: class {other}", sde.id),
        };
        assert_eq!(group.becomes, Some(expected), "{}", sde.id);
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

/// Mean and variance of the coordinate at the horizon, from our coefficients by the textbook formulas
/// of an Ornstein-Uhlenbeck process (Karatzas and Shreve 1991, section 5.6), against the catalogue's.
#[test]
fn scalar_coefficients_give_the_catalogues_law() {
    let mut checked = 0;
    for sde in in_scope().filter(|s| s.states().len() == 1) {
        let planned = plan(&sde.text());
        let (scale, shift) = affine(&planned, &sde, 0);
        let pool = &planned.model.pool;
        let mut values = parameters(&planned);
        let state = &planned.model.states[0];
        values.insert(
            state.symbol,
            sde.entry["x0"][&state.name].as_float().unwrap(),
        );
        let at = |e: Expr| pool.eval_f64(e, &values).unwrap();
        let linear = system(&planned);
        let (a, alpha, c) = (at(linear.a[0][0]), at(linear.alpha[0]), at(linear.c[0][0]));
        let u0 = at(planned.plan.coordinates[0].forward);
        let horizon = sde.entry["T"].as_float().unwrap();
        let weight = |rate: f64| {
            if rate == 0.0 {
                horizon
            } else {
                (rate * horizon).exp_m1() / rate
            }
        };
        let (mean, variance) = (
            u0 * (a * horizon).exp() + alpha * weight(a),
            c * c * weight(2.0 * a),
        );
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
    assert_eq!(checked, 19);
}

#[test]
fn coefficients_of_systems_are_the_catalogues() {
    let mut checked = 0;
    for sde in in_scope().filter(|s| s.states().len() > 1) {
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

#[test]
fn a_small_cube_in_the_drift_turns_exactness_off() {
    for sde in in_scope() {
        let state = sde.states().remove(0);
        let drift = sde.entry["drift"][&state].as_str().unwrap();
        let moved = sde.with_drift(&state, &format!("{drift} + 1e-9*{state}^3"));
        assert!(!is_exact(&plan(&moved.text())), "{}", sde.id);
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
        ("pub-037", "S", "W1", "s*S^(1 + 1e-9)"),
        ("pub-043", "G", "W2", "s2*G^(1 - 1e-9)"),
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
        ("pub-038", "B", "1e-9*B*log(B)"),
        ("pub-041", "q", "1e-9*q"),
    ] {
        let drift = sdes[id].entry["drift"][state].as_str().unwrap();
        let moved = sdes[id].with_drift(state, &format!("{drift} + {more}"));
        assert!(is_exact(&plan(&moved.text())), "{id}");
    }
}
