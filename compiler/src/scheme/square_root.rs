//! Groups of one state stepped by its noncentral chi-square transition.

use super::{Becomes, Drawn, Group, Kind, Law, Method, SchemeName, SquareRootStep};
use crate::analysis::square_root::{AtZero, SquareRoot};
use crate::model::Model;
use crate::symbolic::{Expr, Sign};

/// The group of a state with a square-root law.
pub(super) fn group(model: &Model, state: usize, law: &SquareRoot) -> Group {
    let mut trace = law.trace.clone();
    let lines = match law.moving {
        true => moving_transition(model, law),
        false => transition(model, law),
    };
    for (note, formula) in lines {
        trace.push("transition law", note, None, formula);
    }
    let draw = by_moments(model, state, law).map_or(Drawn::Exactly, Drawn::ByMoments);
    let exact = draw == Drawn::Exactly;
    Group {
        states: vec![state],
        kind: if exact {
            Kind::Exact
        } else {
            Kind::Approximate
        },
        law: exact.then(|| name(model, state, law)).flatten(),
        becomes: Some(Becomes::SquareRoot),
        scheme: if exact {
            SchemeName::Exact
        } else {
            SchemeName::QuadraticExponential
        },
        strong_order: None,
        weak_order: None,
        preserves_domain: !law.leaves,
        reasons: reasons(model, state, law, exact),
        rejected: rejected(exact),
        trace,
        method: Method::SquareRoot(SquareRootStep {
            state,
            level: law.level,
            rate: law.rate,
            square: law.square,
            dimension: law.dimension,
            moving: law.moving,
            at_zero: law.at_zero,
            against: [0, 1, 2].map(|n| law.dimension_against(model, n)),
            draw,
        }),
    }
}

/// The coefficients of `dB` where the quadratic-exponential scheme was asked for and can be carried out.
fn by_moments(model: &Model, state: usize, law: &SquareRoot) -> Option<Vec<Expr>> {
    let (asked, _) = model.states[state].scheme?;
    let fits = asked == SchemeName::QuadraticExponential && no_moments(model, law).is_none();
    fits.then(|| law.unit(model)).flatten()
}

/// Why the quadratic-exponential scheme does not fit a square-root process.
pub(super) fn no_moments(model: &Model, law: &SquareRoot) -> Option<String> {
    let reflected = law.at_zero != AtZero::Absorbed && model.pool.sign(law.level).is_non_negative();
    if !reflected {
        return Some("it is for processes that are reflected at 0 or do not reach it".to_owned());
    }
    if law.moving {
        return Some("its coefficients depend on time".to_owned());
    }
    law.unit(model)
        .is_none()
        .then(|| "its noise may vanish for some parameters".to_owned())
}

fn rejected(exact: bool) -> Vec<(SchemeName, String)> {
    if !exact {
        return Vec::new();
    }
    vec![(
        SchemeName::FullTruncationEuler,
        "a discretisation has an error that the exact law does not have".to_owned(),
    )]
}

/// The name of the transition law; none where it is one or the other by the parameters' values.
fn name(model: &Model, state: usize, law: &SquareRoot) -> Option<Law> {
    // A law that is stopped has its name also where some parameter values keep it from zero.
    let stopped = (law.at_zero == AtZero::Absorbed).then_some(true);
    let atom = law.has_atom(model).or(stopped)?;
    Some(
        match (
            atom,
            law.coordinate
                .is_affine(&model.pool, model.states[state].symbol),
        ) {
            (true, _) => Law::AbsorbedNoncentralChiSquare,
            (false, true) => Law::NoncentralChiSquare,
            (false, false) => Law::TransformedNoncentralChiSquare,
        },
    )
}

/// The law over a time t as formulas: the coordinate is `scale` times a noncentral chi-square variable.
fn transition(model: &Model, law: &SquareRoot) -> Vec<(String, Expr)> {
    let pool = &model.pool;
    let y = law.coordinate.forward;
    let time = pool.var(model.time);
    let decay = pool.exp(pool.neg(pool.mul(law.rate, time)));
    let elapsed = if pool.is_zero_literal(law.rate) {
        time
    } else {
        pool.div(pool.sub(pool.one(), decay), law.rate)
    };
    let scale = pool.simplify(pool.div(pool.mul(law.square, elapsed), pool.int(4)));
    let left = pool.mul(y, decay);
    let mean = pool.add(left, pool.mul(law.level, elapsed));
    let half = pool.div(pool.mul(law.level, elapsed), pool.int(2));
    let variance = pool.product([law.square, elapsed, pool.add(left, half)]);
    let shown = pool.format(y);
    let what = format!(
        "{shown} after a time t, given its value before, is `scale` times a noncentral chi-square variable"
    );
    let mut lines = vec![
        (format!("{what}: degrees of freedom"), law.dimension),
        ("its scale".to_owned(), scale),
        (
            "its noncentrality".to_owned(),
            pool.simplify(pool.div(left, scale)),
        ),
    ];
    if law.at_zero == AtZero::Absorbed {
        lines.push((
            "half of that, which a gamma variable of shape 1 - degrees/2 must not exceed: else the path has been \
             absorbed"
                .to_owned(),
            pool.simplify(pool.div(left, pool.mul(pool.int(2), scale))),
        ));
    } else {
        lines.push((format!("mean of {shown}"), pool.simplify(mean)));
        lines.push((format!("variance of {shown}"), pool.simplify(variance)));
    }
    lines
}

/// The law over a time t where coefficients depend on time: what is integrated.
fn moving_transition(model: &Model, law: &SquareRoot) -> Vec<(String, Expr)> {
    let pool = &model.pool;
    let shown = pool.format(law.coordinate.forward);
    let quarter = pool.simplify(pool.div(law.square, pool.int(4)));
    vec![
        (
            format!(
                "{shown} after a time, given its value before, is `scale` times a noncentral chi-square variable: \
                 degrees of freedom"
            ),
            law.dimension,
        ),
        (
            "its scale c is integrated from 0 on: dc = (this - rate c) dt".to_owned(),
            quarter,
        ),
        (
            "the rate, at which also what is left of the value before falls, the noncentrality times the scale"
                .to_owned(),
            law.rate,
        ),
    ]
}

fn reasons(model: &Model, state: usize, law: &SquareRoot, exact: bool) -> Vec<String> {
    let pool = &model.pool;
    let name = &model.states[state].name;
    let y = pool.format(law.coordinate.forward);
    let drift = pool.format(pool.sub(law.level, pool.mul(law.rate, law.coordinate.forward)));
    let root = |e: Expr| pool.simplify(pool.sqrt(e));
    let noise = pool.format(pool.mul(root(law.square), root(law.coordinate.forward)));
    let left = if law.coordinate.is_identity() {
        format!("d{y}")
    } else {
        format!("d({y})")
    };
    let dimension = pool.format(law.dimension);
    let drawn = if exact {
        format!(
            "That is a square-root process of dimension {dimension}{}, so that each step is drawn from its noncentral \
             chi-square transition{}: there is no discretisation error.",
            if law.moving { " at all times" } else { "" },
            if law.moving {
                ", whose scale and noncentrality are integrated over the step to rounding accuracy"
            } else {
                ""
            },
        )
    } else {
        format!(
            "That is a square-root process of dimension {dimension}. The author asked for {} for {name}: a step has the mean \
             and the variance of the noncentral chi-square transition, and no more of it (Andersen 2008, section 3.2).",
            SchemeName::QuadraticExponential
        )
    };
    vec![
        format!("Ito's rule gives {left} = ({drift}) dt + {noise} dB with a Brownian motion B."),
        drawn,
        at_zero(model, name, &y, law),
    ]
}

fn at_zero(model: &Model, name: &str, y: &str, law: &SquareRoot) -> String {
    let below = law.dimension_against(model, 0);
    match law.at_zero {
        AtZero::NotReached => {
            format!(
                "The dimension is at least 2 for all admissible parameters: {y} does not reach 0."
            )
        }
        AtZero::Reflected if below == Sign::Positive => {
            format!("Where the dimension is below 2, {y} reaches 0 and is reflected there at once.")
        }
        AtZero::Reflected => format!(
            "Where the dimension is between 0 and 2, {y} reaches 0 and is reflected there at once; where it is 0 or \
             less, it stays at 0."
        ),
        AtZero::Absorbed if law.leaves => format!(
            "Where the dimension is below 2, {name} reaches the open end of its domain: such paths stop there and are \
             counted as having left."
        ),
        AtZero::Absorbed => format!(
            "Where the dimension is below 2, {y} reaches 0 and stays there: the transition has an atom at 0."
        ),
    }
}
