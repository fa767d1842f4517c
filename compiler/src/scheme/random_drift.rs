//! Groups of one state stepped by the law of a Brownian motion with a random drift, or of its distance from the
//! start.

use super::step::Frame;
use super::{Becomes, Group, Kind, Law, Method, RandomDriftStep, SchemeName};
use crate::analysis::random_drift::{RandomDrift, Shape};
use crate::model::Model;
use crate::symbolic::Expr;

/// The group of a state with such a law.
pub(super) fn group(model: &Model, frame: &Frame<'_>, state: usize, law: &RandomDrift) -> Group {
    let mut trace = law.trace.clone();
    for (note, formula) in transition(model, law) {
        trace.push("transition law", note, None, formula);
    }
    let affine = law
        .coordinate
        .is_affine(&model.pool, model.states[state].symbol);
    let (becomes, name) = match (law.shape, affine) {
        (Shape::Line, true) => (Becomes::RandomDrift, Law::GaussianMixture),
        (Shape::Line, false) => (Becomes::RandomDrift, Law::TransformedGaussianMixture),
        (Shape::HalfLine, true) => (Becomes::BesselWithDrift, Law::BesselWithDrift),
        (Shape::HalfLine, false) => (Becomes::BesselWithDrift, Law::TransformedBesselWithDrift),
    };
    Group {
        states: vec![state],
        kind: Kind::Exact,
        law: Some(name),
        becomes: Some(becomes),
        scheme: SchemeName::Exact,
        strong_order: None,
        weak_order: None,
        preserves_domain: true,
        reasons: reasons(model, law),
        rejected: vec![(
            SchemeName::Milstein,
            "a discretisation has an error that the exact law does not have".to_owned(),
        )],
        trace,
        method: Method::RandomDrift(RandomDriftStep {
            state,
            drift: frame.write(law.process.drift),
            speed: law.speed,
            square: law.square,
            shape: law.shape,
        }),
    }
}

/// The law over a time t as formulas.
fn transition(model: &Model, law: &RandomDrift) -> Vec<(String, Expr)> {
    let pool = &model.pool;
    let u = law.coordinate.forward;
    let time = pool.var(model.time);
    let shown = pool.format(u);
    let gain = pool.mul(law.speed, time);
    let variance = pool.mul(law.square, time);
    let [up, _] = law.weights(model).map(|w| pool.simplify(w));
    match law.shape {
        Shape::Line => {
            let mean = pool.add(u, pool.mul(law.process.drift, time));
            let spread = pool.sub(pool.square(law.speed), pool.square(law.process.drift));
            let whole = pool.add(variance, pool.mul(spread, pool.square(time)));
            vec![
                (
                    format!(
                        "{shown} after a time t, given its value before, is normal about a mean further up or further \
                         down by"
                    ),
                    gain,
                ),
                ("with the variance".to_owned(), variance),
                ("further up with the probability".to_owned(), up),
                (format!("mean of {shown}"), pool.simplify(mean)),
                (format!("variance of {shown}"), pool.simplify(whole)),
            ]
        }
        Shape::HalfLine => vec![
            (
                format!(
                    "{shown} after a time t, given its value before, is the length of a vector in three dimensions of \
                     that length that has moved in a fixed direction by"
                ),
                gain,
            ),
            (
                "and of independent normal displacements of the variance".to_owned(),
                variance,
            ),
            (
                "the cosine w of its angle to that direction before had a density proportional to exp(k w), with k"
                    .to_owned(),
                pool.simplify(pool.div(pool.mul(law.speed, u), law.square)),
            ),
        ],
    }
}

fn reasons(model: &Model, law: &RandomDrift) -> Vec<String> {
    let pool = &model.pool;
    let u = pool.format(law.coordinate.forward);
    let left = if law.coordinate.is_identity() {
        format!("d{u}")
    } else {
        format!("d({u})")
    };
    let drift = pool.format(law.process.drift);
    let noise = pool.format(pool.simplify(pool.sqrt(law.square)));
    let (speed, opposite) = (pool.format(law.speed), pool.format(pool.neg(law.speed)));
    let equation =
        format!("Ito's rule gives {left} = ({drift}) dt + {noise} dB with a Brownian motion B.");
    let known = match law.shape {
        Shape::Line => format!(
            "The slope of that drift makes {u} a Brownian motion with the drift {speed} or {opposite}, of which nobody \
             can see which it is: given its value, each has a known probability, so that each step is drawn from a \
             mixture of two normal laws. There is no discretisation error."
        ),
        Shape::HalfLine => format!(
            "The slope of that drift makes {u} the distance from 0 of a Brownian motion in three dimensions with a \
             drift of size {speed}: given the distance, the direction follows the law of von Mises and Fisher, so that \
             each step is drawn from both. There is no discretisation error, and 0 is not reached."
        ),
    };
    vec![equation, known]
}
