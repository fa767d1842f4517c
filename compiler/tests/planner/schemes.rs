//! The choice of schemes: coefficients against published ones, overrides, ends of domains, noise.

use crate::support::{Planned, plan};
use driftwright::diagnostic::Code;
use driftwright::scheme::{
    Becomes, Component, EdgeRule, Group, Law, Method, Order, RowNoise, SchemeName, StateStep,
};

const TWO_DRIVERS: &str = "[model]\nname = \"m\"\ndrivers = [\"W\", \"B\"]\n[parameters]\n\
    mu = { value = 0.1 }\nkappa = { value = 1, range = \"(0, inf)\" }\n\
    theta = { value = 0.1, range = \"(0, inf)\" }\nsigma = { value = 0.2, range = \"(0, inf)\" }\n\
    eta = { value = 0.3, range = \"(0, inf)\" }\nrho = { value = 0.5, range = \"[-1, 1]\" }\n\
    [correlation]\nW.B = \"rho\"\n";

/// A model with two correlated drivers and these states.
fn two(states: &str) -> Planned {
    plan(&format!("{TWO_DRIVERS}{states}"))
}

/// A state in the first driver.
fn state(name: &str, drift: &str, noise: &str, more: &str) -> String {
    format!(
        "[states.{name}]\ninitial = \"0.5\"\ndrift = \"{drift}\"\ndiffusion = {{ {noise} }}\n{more}\n"
    )
}

fn only(planned: &Planned) -> &Group {
    let [group] = &planned.plan.groups[..] else {
        panic!("{:#?}", planned.plan.groups)
    };
    group
}

fn steps(group: &Group) -> &[StateStep] {
    let Method::Step(steps) = &group.method else {
        panic!("{:?}", group.method)
    };
    steps
}

/// The Milstein terms of a step, with formulas printed.
fn milstein(planned: &Planned, step: &StateStep) -> Vec<(usize, usize, String)> {
    step.milstein
        .iter()
        .map(|&(j, k, e)| (j, k, planned.model.pool.format(e)))
        .collect()
}

fn errors(planned: &Planned) -> Vec<String> {
    let refused = planned
        .found
        .iter()
        .filter(|d| d.code == Code::SchemeRefused && d.is_error());
    refused.map(|d| d.message.clone()).collect()
}

/// b b'/2 for noise s sqrt(1 + x^2): s^2 x/2 (Kloeden and Platen 1992, equation 10.3.1).
#[test]
fn milsteins_term_of_one_driver() {
    let planned = two(&state(
        "X",
        "kappa*(theta - X)",
        "W = \"sigma*sqrt(1 + X^2)\"",
        "",
    ));
    let group = only(&planned);
    assert_eq!(group.scheme, SchemeName::Milstein);
    assert_eq!(
        (group.strong_order, group.weak_order),
        (Some(Order::ONE), Some(Order::ONE))
    );
    let pool = &planned.model.pool;
    let [(0, 0, term)] = steps(group)[0].milstein[..] else {
        panic!("{group:?}")
    };
    let expected = driftwright::front::formula::parse_in_pool(pool, "sigma^2*X/2").unwrap();
    assert!(pool.equal(term, expected).is_yes(), "{}", pool.format(term));
}

/// Noise x (s dW + e dB): L^W b^B = L^B b^W = s e x, which commutes (Kloeden and Platen 1992, section
/// 10.3). A nonlinear drift keeps the exact law away.
#[test]
fn commutative_noise_of_two_correlated_drivers() {
    let drift = "sin(X)";
    let planned = two(&state(
        "X",
        drift,
        "W = \"sigma*X\", B = \"eta*X\"",
        "domain = \"(0, inf)\"",
    ));
    let group = only(&planned);
    assert_eq!(group.scheme, SchemeName::Milstein);
    let terms = milstein(&planned, &steps(group)[0]);
    let expected = [
        (0, 0, "sigma^2*X/2"),
        (0, 1, "eta*sigma*X"),
        (1, 1, "eta^2*X/2"),
    ];
    assert_eq!(terms, expected.map(|(j, k, e)| (j, k, e.to_owned())));
}

/// Noise (dW, x dB) does not commute: L^W b^B - L^B b^W = 1.
#[test]
fn noise_that_does_not_commute_falls_back_to_euler() {
    let text = state("X", "sin(X)", "W = \"1\"", "") + &state("Y", "0", "B = \"X\"", "");
    let planned = two(&text);
    let group = only(&planned);
    assert_eq!(group.scheme, SchemeName::EulerMaruyama);
    assert_eq!(group.strong_order, Some(Order::HALF));
    assert_eq!(group.weak_order, Some(Order::ONE));
    let (scheme, reason) = group.rejected.last().unwrap();
    assert_eq!(*scheme, SchemeName::Milstein);
    assert!(reason.contains("differ by 1,"), "{reason}");

    let asked = |name: &str| {
        text.replace(
            "drift = \"0\"",
            &format!("drift = \"0\"\nscheme = \"{name}\""),
        )
    };
    let refused = errors(&two(&asked("tamed_milstein")));
    let start = "`tamed_milstein` cannot be used for Y: the noise of Y does not commute";
    assert!(refused[0].contains(start), "{refused:?}");
}

/// Noise (dW, x dB) by Milstein's scheme: `I_(W,B)` is half the product of the increments, less its mean, and the area
/// (Kloeden and Platen 1992, section 10.3).
#[test]
fn levy_areas_where_milstein_was_asked_for() {
    let text = state("X", "sin(X)", "W = \"1\"", "scheme = \"milstein\"")
        + &state("Y", "0", "B = \"X\"", "scheme = \"milstein\"");
    let planned = two(&text);
    assert!(errors(&planned).is_empty());
    let group = only(&planned);
    assert_eq!(
        (group.scheme, group.strong_order, group.weak_order),
        (SchemeName::Milstein, Some(Order::ONE), Some(Order::ONE))
    );
    let pool = &planned.model.pool;
    let printed = |terms: &[(usize, usize, driftwright::symbolic::Expr)]| -> Vec<_> {
        let terms = terms.iter();
        terms.map(|&(j, k, e)| (j, k, pool.format(e))).collect()
    };
    let [x, y] = steps(group) else {
        panic!("{group:?}")
    };
    assert!(x.milstein.is_empty() && x.areas.is_empty());
    assert_eq!(printed(&y.milstein), [(0, 1, "1/2".to_owned())]);
    assert_eq!(printed(&y.areas), [(0, 1, "1".to_owned())]);
    // Both drivers are drawn, although the noise of Y has one.
    let drawn = &planned.plan.noise.components;
    assert!(
        drawn
            .iter()
            .any(|c| c.component == Component::Increment { driver: 0 })
    );
    assert!(group.reasons.iter().any(|r| r.contains("Levy areas")));
}

/// A driver that the exact law of a square-root process uses up has no increments that an area could be drawn for.
#[test]
fn no_areas_with_a_driver_that_is_used_up() {
    let text = "[model]\nname = \"m\"\ndrivers = [\"W\", \"B\"]\n".to_owned()
        + "[states.V]\ninitial = \"1\"\ndrift = \"1 - V\"\ndiffusion = { W = \"sqrt(V)\" }\n\
           domain = \"[0, inf)\"\nat_edge = \"as_equation\"\n"
        + &state("Y", "sin(Y)", "B = \"V\"", "scheme = \"milstein\"");
    let refused = errors(&plan(&text));
    let reason = "need the increments of W, which the exact law of V uses up";
    assert!(
        refused.len() == 1 && refused[0].contains(reason),
        "{refused:?}"
    );
}

#[test]
fn additive_noise_has_order_one_without_a_milstein_term() {
    let asked = "scheme = \"milstein\"";
    let planned = two(&state("X", "X - X^3", "W = \"sigma\"", asked));
    let group = only(&planned);
    assert_eq!(
        (group.scheme, group.strong_order),
        (SchemeName::Milstein, Some(Order::ONE))
    );
    assert!(steps(group)[0].milstein.is_empty());
    assert!(
        group.reasons.iter().any(|r| r.contains("coincide")),
        "{:?}",
        group.reasons
    );
    assert!(
        group.reasons.iter().any(|r| r.contains("|X|^3")),
        "{:?}",
        group.reasons
    );
}

#[test]
fn a_kink_in_the_noise_excludes_milstein() {
    let planned = two(&state("X", "-X", "W = \"sigma*max(X, 0)\"", ""));
    let group = only(&planned);
    assert_eq!(
        (group.scheme, group.strong_order),
        (SchemeName::EulerMaruyama, Some(Order::HALF))
    );
    assert_eq!(group.weak_order, None);
}

#[test]
fn square_root_noise_without_a_law_is_truncated_and_its_integral_steps_with_it() {
    let rate = state(
        "r",
        "kappa*(theta - r) + eta*sqrt(r)",
        "W = \"sigma*sqrt(r)\"",
        "domain = \"[0, inf)\"\nat_edge = \"as_equation\"",
    );
    let planned = two(&(rate + "[states.I]\ninitial = \"0\"\ndrift = \"r\"\n"));
    let group = only(&planned);
    assert_eq!(
        (group.scheme, group.states.as_slice()),
        (SchemeName::FullTruncationEuler, &[0, 1][..])
    );
    assert_eq!((group.strong_order, group.preserves_domain), (None, true));
    let pool = &planned.model.pool;
    let coordinate = &planned.plan.coordinates[0];
    assert_eq!(pool.format(coordinate.forward), "r");
    assert_eq!(pool.format(coordinate.inverse), "max(u_r, 0)");
    assert_eq!(
        pool.format(steps(group)[0].diffusion[0]),
        "sigma*sqrt(max(u_r, 0))"
    );
    assert_eq!(pool.format(steps(group)[1].drift), "max(u_r, 0)");
}

/// Entrance at 0 if and only if 2 kappa theta >= sigma^2 (Feller 1951): an open end needs the assumption.
#[test]
fn an_open_end_of_a_square_root_process_needs_fellers_condition() {
    let text = state(
        "r",
        "kappa*(theta - r)",
        "W = \"sigma*sqrt(r)\"",
        "domain = \"(0, inf)\"",
    );
    let warned = two(&text);
    let warning = warned
        .found
        .iter()
        .find(|d| d.code == Code::OpenEndReached)
        .unwrap();
    assert!(
        warning.message.contains("2*kappa*theta >= sigma^2"),
        "{}",
        warning.message
    );
    let calm = two(&format!(
        "{text}[assumptions]\nfeller = \"2*kappa*theta >= sigma^2\"\n"
    ));
    assert!(
        calm.found.iter().all(|d| d.code != Code::OpenEndReached),
        "{:?}",
        calm.found
    );
}

#[test]
fn absorbed_and_reflected_ends_are_rules_of_the_step() {
    let absorbed = "domain = \"[0, 1]\"\nat_edge = { lower = \"absorb\", upper = \"reflect\" }";
    let planned = two(&state("p", "0", "W = \"sigma*sqrt(p*(1 - p))\"", absorbed));
    let group = only(&planned);
    let pool = &planned.model.pool;
    assert_eq!(
        (group.scheme, group.preserves_domain),
        (SchemeName::EulerMaruyama, true)
    );
    assert_eq!(
        steps(group)[0].lower,
        Some(EdgeRule::Absorb { end: pool.zero() })
    );
    assert_eq!(
        steps(group)[0].upper,
        Some(EdgeRule::Reflect { end: pool.one() })
    );
}

#[test]
fn geometric_brownian_motion_without_a_domain_is_told_to_declare_it() {
    let planned = two(&state("S", "mu*S", "W = \"sigma*S\"", ""));
    let group = only(&planned);
    assert!(!group.is_exact());
    assert!(
        group.reasons[0].contains("domain = \"(0, inf)\""),
        "{:?}",
        group.reasons
    );
}

#[test]
fn independent_laws_are_groups_of_their_own_and_correlated_ones_are_not() {
    let a = state("S", "mu*S", "W = \"sigma*S\"", "domain = \"(0, inf)\"");
    let b = state("X", "mu", "B = \"eta\"", "");
    let joined = two(&(a.clone() + &b));
    let group = only(&joined);
    assert_eq!(
        (group.law, group.becomes),
        (
            Some(Law::TransformedNormal),
            Some(Becomes::LinearGaussianSystem)
        )
    );
    let apart = plan(&(TWO_DRIVERS.replace("W.B = \"rho\"", "") + &a + &b));
    let laws: Vec<_> = apart
        .plan
        .groups
        .iter()
        .map(|g| (g.law, g.becomes))
        .collect();
    let brownian = Some(Becomes::ArithmeticBrownianMotion);
    assert_eq!(
        laws,
        [
            (Some(Law::Lognormal), brownian),
            (Some(Law::Normal), brownian)
        ]
    );
}

#[test]
fn a_failing_state_takes_only_its_dependants_with_it() {
    let planned = two(&(state("r", "kappa*(theta - r)", "W = \"sigma\"", "")
        + &state("Y", "r - Y^3", "B = \"eta\"", "")
        + &state("Z", "Y - Z", "B = \"eta\"", "")
        + "[states.I]\ninitial = \"0\"\ndrift = \"r\"\n"));
    let exact: Vec<_> = planned
        .plan
        .groups
        .iter()
        .map(|g| (g.is_exact(), g.states.clone()))
        .collect();
    assert_eq!(exact, [(true, vec![0, 3]), (false, vec![1, 2])]);
    let names: Vec<_> = planned
        .plan
        .noise
        .components
        .iter()
        .map(|c| c.source.as_str())
        .collect();
    assert_eq!(names, ["B", "W", "law:I"]);
    assert_eq!(
        planned
            .plan
            .noise
            .position(Component::Increment { driver: 1 }),
        Some(0)
    );
}

#[test]
fn a_row_names_its_driver_only_while_nobody_else_does() {
    let planned = two(&(state("r", "kappa*(theta - r)", "W = \"sigma\"", "")
        + &state("Y", "-Y^3", "W = \"r\"", "")));
    let names: Vec<_> = planned
        .plan
        .noise
        .components
        .iter()
        .map(|c| c.source.as_str())
        .collect();
    assert_eq!(names, ["W", "law:r"]);
    let Method::LinearGaussian(system) = &planned.plan.groups[0].method else {
        panic!()
    };
    assert_eq!(system.noise, [RowNoise::Convolution]);
}

#[test]
fn states_without_noise_are_solved_or_stepped_by_runge_kutta() {
    let planned = two(
        "[states.x]\ninitial = \"1\"\ndrift = \"-kappa*x + mu\"\ndomain = \"(0, inf)\"\n\
         [states.n]\ninitial = \"1\"\ndrift = \"n*(1 - n)\"\n",
    );
    let [linear, logistic] = &planned.plan.groups[..] else {
        panic!()
    };
    assert_eq!(
        (linear.law, linear.becomes),
        (Some(Law::Deterministic), Some(Becomes::Deterministic))
    );
    assert_eq!(logistic.law, Some(Law::Deterministic));
    assert!(!logistic.is_exact());
    assert_eq!(
        (logistic.scheme, logistic.strong_order),
        (SchemeName::RungeKutta4, Some(Order::FOUR))
    );
    assert!(planned.plan.noise.components.is_empty());
}

#[test]
fn overrides_are_honoured_or_refused_with_a_reason() {
    let text = |scheme: &str| {
        state(
            "X",
            "kappa*(theta - X)",
            "W = \"sigma\"",
            &format!("scheme = \"{scheme}\""),
        )
    };
    let exact = two(&text("exact"));
    assert!(only(&exact).is_exact() && errors(&exact).is_empty());
    for scheme in [
        "milstein",
        "euler_maruyama",
        "tamed_euler",
        "tamed_milstein",
        "strong_taylor_1_5",
    ] {
        let planned = two(&text(scheme));
        assert_eq!(only(&planned).scheme.name(), scheme);
        assert!(errors(&planned).is_empty());
    }
    for (scheme, reason) in [
        ("runge_kutta_4", "X is random"),
        ("full_truncation_euler", "no finite end"),
        ("quadratic_exponential", "for square-root processes"),
        ("conditional_gaussian", "not normal given"),
        ("full_truncation_euler", "no finite end"),
    ] {
        let refused = errors(&two(&text(scheme)));
        assert!(
            refused.len() == 1 && refused[0].contains(reason),
            "{scheme}: {refused:?}"
        );
    }
    let no_law = two(&state(
        "X",
        "X - X^3",
        "W = \"sigma\"",
        "scheme = \"exact\"",
    ));
    assert!(
        errors(&no_law)[0].contains("the drift of X is not linear in X"),
        "{:?}",
        errors(&no_law)
    );
}

#[test]
fn the_authors_coordinate_is_stepped_and_its_exact_law_used() {
    let logistic = state(
        "X",
        "X*(1 - X)",
        "W = \"sigma*X\"",
        "domain = \"(0, inf)\"\nthrough = \"log(X)\"",
    );
    let planned = two(&logistic);
    let group = only(&planned);
    let pool = &planned.model.pool;
    assert!(!group.is_exact() && group.preserves_domain);
    assert_eq!(pool.format(planned.plan.coordinates[0].inverse), "exp(u_X)");
    assert_eq!(
        pool.format(steps(group)[0].drift),
        "1 - sigma^2/2 - exp(u_X)"
    );
    let exact = two(&state(
        "S",
        "mu*S",
        "W = \"sigma*S\"",
        "domain = \"(0, inf)\"\nthrough = \"2*log(S)\"",
    ));
    assert_eq!(only(&exact).law, Some(Law::Lognormal));
    assert_eq!(
        exact.model.pool.format(exact.plan.coordinates[0].forward),
        "2*log(S)"
    );
}

#[test]
fn a_correlation_that_moves_is_part_of_one_exact_draw() {
    let text = state("X", "mu", "W = \"sigma\"", "") + &state("Y", "mu", "B = \"eta\"", "");
    for (rho, moves) in [("rho*exp(-t)", true), ("rho", false)] {
        let planned = plan(&(TWO_DRIVERS.replace("\"rho\"", &format!("\"{rho}\"")) + &text));
        let Method::LinearGaussian(system) = &only(&planned).method else {
            panic!("{:?}", only(&planned).reasons)
        };
        assert_eq!(system.moving, moves);
    }
}

#[test]
fn a_kink_in_parameters_alone_is_a_constant() {
    let planned = two(&state("X", "-max(kappa, theta)*X", "W = \"abs(mu)\"", ""));
    assert!(only(&planned).is_exact(), "{:?}", only(&planned).reasons);
}

#[test]
fn a_deterministic_state_that_leaves_its_open_domain_is_warned_of() {
    let text = |drift: &str| {
        format!("[states.x]\ninitial = \"1\"\ndrift = \"{drift}\"\ndomain = \"(0, inf)\"\n")
    };
    let reached = |p: &Planned| p.found.iter().any(|d| d.code == Code::OpenEndReached);
    assert!(reached(&two(&text("-kappa"))));
    assert!(!reached(&two(&text("theta - kappa*x"))));
}

/// The first rows of the usual table of schemes: tamed where the drift is steep and pulls inwards, order 1.5
/// where the noise is additive (common practice; Kloeden and Platen 1992, section 10.4).
#[test]
fn steep_drifts_are_tamed_and_additive_noise_is_taken_to_order_one_and_a_half() {
    for (drift, noise, scheme) in [
        ("X - X^3", "W = \"sigma\"", "tamed_milstein"),
        ("X - X^3", "W = \"sigma*X\"", "tamed_milstein"),
        ("X + X^3", "W = \"sigma\"", "strong_taylor_1_5"),
        ("X - X^3", "W = \"sigma*X^2\"", "milstein"),
        ("sin(X)", "W = \"sigma\"", "strong_taylor_1_5"),
        ("sin(X)", "W = \"sigma\", B = \"eta\"", "strong_taylor_1_5"),
        ("sin(X)", "W = \"sigma*sin(X)\"", "milstein"),
        ("abs(X)", "W = \"sigma\"", "euler_maruyama"),
    ] {
        let planned = two(&state("X", drift, noise, ""));
        assert_eq!(only(&planned).scheme.name(), scheme, "{drift}, {noise}");
        assert!(errors(&planned).is_empty());
    }
    let clash =
        state("X", "-X^3", "W = \"sigma\"", "") + &state("Y", "0", "W = \"X\", B = \"eta*Y\"", "");
    let planned = two(&clash);
    let of = |state| {
        planned.plan.groups[planned.plan.group_of(state)]
            .scheme
            .name()
    };
    assert_eq!([of(0), of(1)], ["tamed_euler"; 2]);
    let crossed = two(&(state(
        "X",
        "sin(X)",
        "W = \"X\", B = \"eta\"",
        "scheme = \"strong_taylor_1_5\"",
    )));
    let refused = errors(&crossed);
    assert!(
        refused.len() == 1 && refused[0].contains("Levy areas"),
        "{refused:?}"
    );
}

/// An open domain is mapped onto the line where that makes no coefficient steep; an author's scheme is for the state
/// itself, and what would grow like an exponential in the coordinate stays where it is.
#[test]
fn open_domains_are_left_by_no_step_where_that_costs_nothing() {
    let volatility = state("Y", "kappa*(theta - Y)", "B = \"sigma\"", "");
    let price = |drift: &str, noise: &str, more: &str| {
        let x = state("X", drift, &format!("W = \"{noise}\""), more);
        two(&format!("{x}{volatility}"))
    };
    let stepped = |planned: &Planned| {
        let group = &planned.plan.groups[planned.plan.group_of(0)];
        let forward = planned.plan.coordinates[0].forward;
        (planned.model.pool.format(forward), group.preserves_domain)
    };
    let positive = "domain = \"(0, inf)\"";
    for (drift, noise, more, expected) in [
        ("0.02*X", "exp(Y)*X", positive, ("log(X)", true)),
        ("Y*X", "(1 + Y^2)*X", positive, ("log(X)", true)),
        (
            "Y*X*(1 - X)",
            "Y*X*(1 - X)",
            "domain = \"(0, 1)\"",
            ("log(X/(1 - X))", true),
        ),
        ("kappa*(1 - X)", "exp(Y)*X", positive, ("X", false)),
        ("0.02*X", "exp(Y)*X^(3/4)", positive, ("X", false)),
        (
            "0.02*X",
            "exp(Y)*X",
            "domain = \"(0, inf)\"\nscheme = \"euler_maruyama\"",
            ("X", false),
        ),
    ] {
        let planned = price(drift, noise, more);
        let (forward, kept) = stepped(&planned);
        assert_eq!((forward.as_str(), kept), expected, "{drift}, {noise}");
    }
}
