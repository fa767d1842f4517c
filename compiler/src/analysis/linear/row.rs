//! The row of one state, given the coordinates of all.

use std::collections::BTreeMap;

use super::Row;
use super::eliminate::{Choice, Finder};
use crate::analysis::dependence::mentioned;
use crate::analysis::free::{Freedom, free_of, kink_in};
use crate::analysis::sample;
use crate::symbolic::Expr;

impl Finder<'_> {
    /// The row of a state in its active coordinate, given the others' active coordinates.
    pub(super) fn row(&self, state: usize) -> Result<Row, String> {
        let pool = &self.model.pool;
        let choice = match &self.entries[state].options {
            Ok(options) => &options[self.entries[state].active],
            Err(reason) => return Err(reason.clone()),
        };
        let drift = choice.process.drift;
        let shown = self.shown(choice);
        let mentioned = mentioned(self.model, drift);
        if kink_in(pool, drift, &self.symbols).is_some() {
            return Err(format!("the drift of {shown} has a kink"));
        }
        let mut slopes = BTreeMap::new();
        let mut rest = drift;
        for j in mentioned {
            let slope = self.slope(drift, j, &shown)?;
            if !pool.is_zero_literal(slope) {
                let forward = self.choice(j).map_or(pool.zero(), |c| c.coordinate.forward);
                rest = pool.sub(rest, pool.mul(slope, forward));
                slopes.insert(j, slope);
            }
        }
        let constant = self.constant(rest, |name| {
            format!("the drift of {shown} is not linear in the coordinates: it depends on {name} otherwise")
        })?;
        let row = Row {
            coordinate: choice.coordinate.clone(),
            process: choice.process.clone(),
            slopes,
            constant,
            noise: choice.noise.clone(),
            drivers: (0..choice.noise.len())
                .filter(|&j| !pool.is_zero_literal(choice.noise[j]))
                .collect(),
            trace: choice.trace.clone(),
        };
        self.verify(&row, &shown)?;
        Ok(row)
    }

    /// `A_ij`: how the drift changes with the coordinate of state `j`.
    fn slope(&self, drift: Expr, j: usize, shown: &str) -> Result<Expr, String> {
        let pool = &self.model.pool;
        let name = &self.model.states[j].name;
        let Some(other) = self.choice(j) else {
            return match free_of(pool, drift, &[self.symbols[j]]) {
                Freedom::Free(_) => Ok(pool.zero()),
                _ => Err(format!(
                    "the drift of {shown} depends on {name}, which is not part of a joint Gaussian law"
                )),
            };
        };
        let along = pool.derivative(other.coordinate.forward, self.symbols[j]);
        let slope = pool.div(pool.derivative(drift, self.symbols[j]), along);
        let coordinate = pool.format(other.coordinate.forward);
        self.constant(slope, |_| {
            format!("the drift of {shown} is not linear in {coordinate}")
        })
    }

    /// `e` as a formula in time and the parameters alone, or why it is none.
    fn constant(&self, e: Expr, refusal: impl Fn(&str) -> String) -> Result<Expr, String> {
        let pool = &self.model.pool;
        match free_of(pool, e, &self.symbols) {
            Freedom::DependsOn(symbol) => Err(refusal(&pool.symbol_name(symbol))),
            Freedom::CannotTell(symbol) => Err(format!(
                "{} (this could not be decided)",
                refusal(&pool.symbol_name(symbol))
            )),
            Freedom::Free(value) => Ok(value),
        }
    }

    /// The finished row against Ito's rule, by normal form and by numbers.
    fn verify(&self, row: &Row, shown: &str) -> Result<(), String> {
        let pool = &self.model.pool;
        let linear = row.slopes.iter().map(|(&j, &slope)| {
            pool.mul(
                slope,
                self.choice(j).map_or(pool.zero(), |c| c.coordinate.forward),
            )
        });
        let drift = pool.add(pool.sum(linear.collect::<Vec<_>>()), row.constant);
        let mut sides = vec![(row.process.drift, drift)];
        sides.extend(
            row.process
                .diffusion
                .iter()
                .copied()
                .zip(row.noise.iter().copied()),
        );
        let proved = sides.iter().all(|&(left, right)| {
            left == right || (pool.equal(left, right).is_yes() && sample::agree(pool, left, right))
        });
        if proved {
            Ok(())
        } else {
            Err(format!(
                "the linear form of {shown} could not be verified by Ito's rule"
            ))
        }
    }

    fn shown(&self, choice: &Choice) -> String {
        self.model.pool.format(choice.coordinate.forward)
    }
}
