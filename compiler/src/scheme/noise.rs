//! The Gaussian vector of a step: who needs which component, and under which name it is drawn.

use super::{
    Component, Drawn, Group, Method, NoiseComponent, NoisePlan, RowNoise, StateStep, Taylor,
};
use crate::model::Model;
use crate::symbolic::{Expr, Pool};

/// Collects the components that the groups read.
pub(super) fn plan(model: &Model, groups: &[Group]) -> NoisePlan {
    let pool = &model.pool;
    let raw = |driver: usize| groups.iter().any(|g| reads_increment(pool, g, driver));
    let increments = (0..model.drivers.len())
        .filter(|&d| raw(d))
        .map(|driver| (Component::Increment { driver }, Some(driver)));
    let companions = (0..model.drivers.len())
        .filter(|&d| groups.iter().any(|g| reads_companion(g, d)))
        .map(|driver| (Component::Companion { driver }, None));
    let convolutions = groups.iter().enumerate().flat_map(|(index, group)| {
        convolutions(pool, group)
            .into_iter()
            .map(move |(state, driver)| {
                (
                    Component::Convolution {
                        group: index,
                        state,
                    },
                    driver,
                )
            })
    });
    let found: Vec<(Component, Option<usize>)> =
        increments.chain(companions).chain(convolutions).collect();
    let users = |driver: usize| found.iter().filter(|&&(_, d)| d == Some(driver)).count();
    let components = found.iter().map(|&(component, driver)| {
        let source = match (component, driver) {
            (Component::Increment { driver }, _) => model.drivers[driver].name.clone(),
            (Component::Companion { driver }, _) => {
                format!("integral:{}", model.drivers[driver].name)
            }
            (Component::Convolution { .. }, Some(d)) if users(d) == 1 => {
                model.drivers[d].name.clone()
            }
            (Component::Convolution { state, .. }, _) => {
                format!("law:{}", model.states[state].name)
            }
        };
        NoiseComponent { component, source }
    });
    NoisePlan {
        components: components.collect(),
    }
}

fn reads_increment(pool: &Pool, group: &Group, driver: usize) -> bool {
    let present = |e: Expr| !pool.is_zero_literal(e);
    match &group.method {
        Method::Step(steps) => steps.iter().any(|s| {
            let mut terms = s.milstein.iter().chain(&s.areas);
            present(s.diffusion[driver])
                || terms.any(|&(j, k, _)| j == driver || k == driver)
                || s.taylor.as_ref().is_some_and(|t| t.reads(driver))
        }),
        Method::LinearGaussian(system) => system
            .noise
            .iter()
            .zip(&system.c)
            .any(|(&noise, c)| noise == RowNoise::Increments && present(c[driver])),
        Method::LinearFlow(flow) => flow.increments.iter().any(|&(j, _)| j == driver),
        Method::Carried(step) => step.states.iter().any(|s| present(s.rest[driver])),
        Method::SquareRoot(step) => match &step.draw {
            Drawn::Exactly => false,
            Drawn::ByMoments(unit) => present(unit[driver]),
        },
        Method::RungeKutta4(_) | Method::RandomDrift(_) => false,
    }
}

fn reads_companion(group: &Group, driver: usize) -> bool {
    let reads = |s: &StateStep| s.taylor.as_ref().is_some_and(|t| t.reads(driver));
    matches!(&group.method, Method::Step(steps) if steps.iter().any(reads))
}

impl Taylor {
    /// Whether a term reads the integral of a driver.
    fn reads(&self, driver: usize) -> bool {
        self.mixed.iter().any(|&(j, ..)| j == driver)
    }
}

/// The convolution rows of a group, each with its driver where it has exactly one.
fn convolutions(pool: &Pool, group: &Group) -> Vec<(usize, Option<usize>)> {
    let Method::LinearGaussian(system) = &group.method else {
        return Vec::new();
    };
    let rows = group.states.iter().zip(&system.noise).zip(&system.c);
    rows.filter(|((_, noise), _)| **noise == RowNoise::Convolution)
        .map(|((&state, _), c)| {
            let mut drivers = (0..c.len()).filter(|&j| !pool.is_zero_literal(c[j]));
            let driver = match (drivers.next(), drivers.next()) {
                (Some(only), None) => Some(only),
                _ => None,
            };
            (state, driver)
        })
        .collect()
}
