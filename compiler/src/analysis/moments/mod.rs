//! Moments of formulas at time t, given the initial values: in closed form where one is found, else
//! as numbers where the moment equations close.
//!
//! Two sources, tried in this order. *Laws*: states with an exact Gaussian law, for which the mean
//! vector and covariance matrix of the coordinates are known, and functions of them that are sums of
//! polynomials times exponentials, or positive parts of such. *Moment equations*: functions that the generator maps to finitely
//! many others, where the stochastic integrals are proved to be true martingales and the coefficients
//! keep the process in its domain. Nothing is returned on a guess.

mod affine;
mod coordinates;
mod edges;
mod equations;
mod exp_poly;
mod gaussian;
mod growth;
mod image;
mod integrability;
mod kinks;
mod law;
mod marginal;
mod random_drift;
mod square_root;
mod tilting;

use std::cell::RefCell;
use std::collections::BTreeMap;

pub use edges::{Edge, edge, is_smooth_at_ends};
pub use law::{LawName, NormalLaw};
pub use marginal::{Atom, ImageLaw, MarginalLaw};

use super::square_root::{SquareRoot, find};
use crate::calculus::{Dynamics, Expansion, System};
use crate::model::Model;
use crate::symbolic::{Expr, Limit, Symbol};
use coordinates::{Change, Chart};
use equations::Equations;
use gaussian::{Gaussian, GaussianRow, covariance_symbol, mean_symbol};
use kinks::Kinks;
use random_drift::Drifts;
use tilting::Tilted;

/// Moment equations are no longer set up once the moments of a model have taken this many formulas.
const MOST_FORMULAS: usize = 200_000;

/// Formulas with more distinct parts are left as they come out of the derivation.
const LARGEST_READABLE: usize = 250;

/// A moment in closed form.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Moment {
    /// Its value, in t and parameters (initial values put in).
    pub value: Expr,
    /// Where it comes from: `normal law`, `lognormal law`, `joint normal law`, `transformed normal
    /// law`, `deterministic` or `moment equations`.
    pub source: String,
}

/// Whether the coefficients of a state, and of all that drive it, grow at most linearly.
pub fn grows_linearly(system: &System<'_>, state: usize) -> bool {
    let pool = system.pool();
    let closure = system.closure([pool.var(system.symbols[state])]);
    growth::is_linear(system, &closure)
}

/// The moments of one model, worked out on demand and remembered.
///
/// ```text
/// let mean = compiled.moments.mean(formula);        // E[formula] in t and parameters
/// let number = compiled.moments.numeric_mean(formula, &values, 1.0);
/// ```
pub struct Moments {
    model: Model,
    dynamics: Dynamics,
    gaussian: Gaussian,
    changes: Vec<Change>,
    /// Per state its law as a square-root process by itself, where it is one.
    square_roots: Vec<Option<Box<SquareRoot>>>,
    /// The states that are Brownian motions with a random drift, beside the Gaussian ones.
    drifts: Drifts,
    means: RefCell<BTreeMap<Expr, Option<Moment>>>,
    /// How many formulas the model had before any moment was sought.
    before: usize,
}

impl Moments {
    /// The moments of a model with its Ito dynamics. Laws are facts of the model: the schemes an author
    /// asks for do not matter here.
    pub fn new(model: &Model, dynamics: &Dynamics) -> Self {
        let found = edges::rows_that_hold(model, dynamics);
        let exact: Vec<usize> = (0..found.len()).filter(|&i| found[i].is_ok()).collect();
        let place = |state: usize| exact.binary_search(&state).ok();
        let rows = exact
            .iter()
            .zip(found.iter().flatten())
            .map(|(&state, row)| GaussianRow {
                state,
                symbol: row.coordinate.symbol,
                forward: row.coordinate.forward,
                inverse: row.coordinate.inverse,
                a: row
                    .slopes
                    .iter()
                    .filter_map(|(&k, &a)| Some((place(k)?, a)))
                    .collect(),
                alpha: row.constant,
                c: row.noise.clone(),
            });
        let square_root = |state: usize| {
            if found[state].is_ok() {
                return None;
            }
            find(model, dynamics, state).law()
        };
        let square_roots: Vec<_> = (0..found.len()).map(square_root).collect();
        let gaussian = Gaussian::new(rows.collect());
        let others = (0..found.len()).filter(|&i| found[i].is_err() && square_roots[i].is_none());
        let drifts = Drifts::find(model, dynamics, &gaussian, others);
        let rest = (0..found.len()).filter(|&i| found[i].is_err());
        let changes = rest
            .filter_map(|state| Change::through(model, state))
            .collect();
        Self {
            model: model.clone(),
            dynamics: dynamics.clone(),
            gaussian,
            changes,
            square_roots,
            drifts,
            means: RefCell::default(),
            before: model.pool.node_count(),
        }
    }

    /// Whether a state has a Gaussian coordinate with a proved law.
    pub fn has_exact_law(&self, state: usize) -> bool {
        self.gaussian.rows.iter().any(|row| row.state == state)
    }

    /// The law of a state as a square-root process by itself, where it is one.
    pub fn square_root(&self, state: usize) -> Option<&SquareRoot> {
        self.square_roots[state].as_deref()
    }

    /// `E[formula]` at time t.
    pub fn mean(&self, formula: Expr) -> Option<Moment> {
        if let Some(known) = self.means.borrow().get(&formula) {
            return known.clone();
        }
        let found = self
            .gaussian_mean(formula)
            .or_else(|| self.equation_mean(formula));
        let found = found.map(|m| Moment {
            value: self.readable(m.value),
            ..m
        });
        self.means.borrow_mut().insert(formula, found.clone());
        found
    }

    /// The variance of a formula at time t.
    pub fn variance(&self, formula: Expr) -> Option<Moment> {
        self.covariance(formula, formula)
    }

    /// The covariance of two formulas at time t.
    pub fn covariance(&self, a: Expr, b: Expr) -> Option<Moment> {
        let pool = &self.model.pool;
        let product = self.mean(pool.mul(a, b))?;
        let (left, right) = (self.mean(a)?, self.mean(b)?);
        let value = pool.sub(product.value, pool.mul(left.value, right.value));
        Some(Moment {
            value: self.readable(value),
            source: product.source,
        })
    }

    /// The central moment of order `order` of a formula at time t, by the binomial formula.
    pub fn central(&self, formula: Expr, order: u32) -> Option<Moment> {
        let pool = &self.model.pool;
        let first = self.mean(formula)?;
        let mut terms = Vec::new();
        let mut source = first.source.clone();
        for k in 0..=order {
            let power = self.mean(pool.pow(formula, pool.int(i64::from(k))))?;
            let shift = pool.pow(pool.neg(first.value), pool.int(i64::from(order - k)));
            terms.push(pool.product([pool.int(binomial(order, k)), power.value, shift]));
            if k > 0 {
                source = power.source;
            }
        }
        Some(Moment {
            value: self.readable(pool.sum(terms)),
            source,
        })
    }

    /// `E[formula]` at time `t` as a number for given parameter values: needs no closed form, and has
    /// no removable singularities (two equal rates, a rate of zero).
    pub fn numeric_mean(
        &self,
        formula: Expr,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        if let Some(expectation) = self.expectation(formula) {
            let rows = self.rows_of(formula);
            let mut at = self
                .system(formula)
                .numbers(&self.model, &rows, values, t)?;
            at.extend(values.iter().map(|(&s, &v)| (s, v)));
            at.insert(self.model.time, t);
            return self.model.pool.eval_f64(expectation, &at);
        }
        self.in_charts(formula, |equations, inside| {
            equations.number(inside, values, t)
        })
    }

    /// Where [`Moments::numeric_mean`] of a formula, or of its powers, comes from.
    pub fn numeric_source(&self, formula: Expr) -> String {
        match self.expectation(formula) {
            Some(_) => {
                let law = self.source_of(formula, &self.rows_of(formula));
                format!("{law}, integrated as numbers")
            }
            None => "moment equations, solved as numbers".to_owned(),
        }
    }

    /// The variance of a formula at time `t` as a number.
    pub fn numeric_variance(
        &self,
        formula: Expr,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        self.numeric_covariance(formula, formula, values, t)
    }

    /// The covariance of two formulas at time `t` as a number.
    pub fn numeric_covariance(
        &self,
        a: Expr,
        b: Expr,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        let mean = |e: Expr| self.numeric_mean(e, values, t);
        // Centred at numbers before multiplying, so that no digits cancel.
        let pool = &self.model.pool;
        let centre = |e: Expr, m: f64| {
            let exact = crate::symbolic::Rational::try_from(m).ok()?;
            Some(pool.sub(e, pool.number(exact)))
        };
        let (left, right) = (centre(a, mean(a)?)?, centre(b, mean(b)?)?);
        mean(pool.mul(left, right))
    }

    /// Why the stochastic integral in the expansion of a formula is a true martingale on every finite
    /// horizon; none where that was not proved.
    pub fn martingale_reason(&self, expansion: &Expansion) -> Option<String> {
        let parts =
            || std::iter::once(expansion.formula).chain(expansion.diffusion.iter().copied());
        let known = |f: Expr| Tilted::read(&self.model, &self.gaussian, f).is_some();
        if self.is_gaussian(expansion.formula) && parts().all(known) {
            let reason = "the formula is built of polynomials and exponentials of a Gaussian vector, \
                          so that all its moments are finite and the stochastic integral is square \
                          integrable";
            return Some(reason.to_owned());
        }
        self.charts(expansion.formula)
            .into_iter()
            .find_map(|chart| {
                let inside = chart.express(expansion.formula);
                if !chart.ends_hold(&self.dynamics, inside) {
                    return None;
                }
                let reason = integrability::martingale_part(&chart.system, inside)?;
                Some(reason.to_owned())
            })
    }

    /// The formula as a person would write it, unless it is too large for anyone to read.
    fn readable(&self, value: Expr) -> Expr {
        let pool = &self.model.pool;
        if pool.size(value) > LARGEST_READABLE {
            return value;
        }
        pool.simplify(value)
    }

    /// The Gaussian system that a formula is read in: with the coordinates of states that have a random drift where
    /// one occurs.
    fn system(&self, formula: Expr) -> &Gaussian {
        match self.drifts.occur(&self.model, formula) {
            true => &self.drifts.system,
            false => &self.gaussian,
        }
    }

    fn gaussian_mean(&self, formula: Expr) -> Option<Moment> {
        let pool = &self.model.pool;
        let expectation = self.expectation(formula)?;
        let (rows, system) = (self.rows_of(formula), self.system(formula));
        let wanted = pool.symbols_of(expectation);
        let mut map = BTreeMap::new();
        for (n, &i) in rows.iter().enumerate() {
            let symbol = mean_symbol(pool, &system.rows[i]);
            if wanted.contains(&symbol) {
                map.insert(symbol, system.mean(&self.model, i)?);
            }
            for &j in &rows[n..] {
                let symbol = covariance_symbol(pool, &system.rows[i], &system.rows[j]);
                if wanted.contains(&symbol) {
                    map.insert(symbol, system.covariance(&self.model, i, j)?);
                }
            }
        }
        let value = pool.substitute(expectation, &map);
        Some(Moment {
            value,
            source: self.source_of(formula, &rows),
        })
    }

    /// `E[formula]` in the symbols that stand for means and covariances of the Gaussian coordinates.
    fn expectation(&self, formula: Expr) -> Option<Expr> {
        if self.drifts.occur(&self.model, formula) {
            return self.drifts.expectation(&self.model, formula);
        }
        if let Some(read) = Tilted::read(&self.model, &self.gaussian, formula) {
            return Some(read.expectation(&self.model.pool, &self.gaussian));
        }
        let (model, gaussian) = (&self.model, &self.gaussian);
        Kinks { model, gaussian }.expectation(formula)
    }

    /// The Gaussian coordinates of the states in a formula, ascending.
    fn rows_of(&self, formula: Expr) -> Vec<usize> {
        let (pool, rows) = (&self.model.pool, &self.system(formula).rows);
        let occurs =
            |row: &GaussianRow| pool.depends_on(formula, self.model.states[row.state].symbol);
        (0..rows.len()).filter(|&i| occurs(&rows[i])).collect()
    }

    /// The name of the law behind a formula of Gaussian coordinates.
    fn source_of(&self, formula: Expr, rows: &[usize]) -> String {
        let pool = &self.model.pool;
        if let Some(name) = self.drifts.source(&self.model, formula) {
            return name.to_owned();
        }
        let states = pool
            .symbols_of(formula)
            .into_iter()
            .filter_map(|s| self.model.state_of(s));
        let used: Vec<&GaussianRow> = states
            .filter_map(|state| self.gaussian.rows.iter().find(|row| row.state == state))
            .collect();
        let identity =
            |row: &GaussianRow| row.inverse == pool.var(self.model.states[row.state].symbol);
        let logarithm = |row: &GaussianRow| row.inverse == pool.exp(pool.var(row.symbol));
        let name = if rows
            .iter()
            .all(|&i| self.gaussian.is_deterministic(pool, i))
        {
            "deterministic"
        } else if used.iter().all(|row| identity(row)) {
            if used.len() == 1 {
                "normal law"
            } else {
                "joint normal law"
            }
        } else if used.len() == 1 && logarithm(used[0]) {
            "lognormal law"
        } else if used.len() == 1 {
            "transformed normal law"
        } else {
            "joint law of normal coordinates"
        };
        name.to_owned()
    }

    fn equation_mean(&self, formula: Expr) -> Option<Moment> {
        let value = self.in_charts(formula, |equations, inside| equations.mean(inside))?;
        Some(Moment {
            value,
            source: "moment equations".to_owned(),
        })
    }

    /// The first answer that moment equations give in some system of coordinates.
    fn in_charts<T>(
        &self,
        formula: Expr,
        answer: impl Fn(&Equations<'_>, Expr) -> Option<T>,
    ) -> Option<T> {
        // The generator says nothing of a formula with a kink.
        if self.model.pool.has_kink(formula).is_some() {
            return None;
        }
        if self.model.pool.node_count() - self.before > MOST_FORMULAS {
            self.model.pool.exceed(Limit::Moments);
            return None;
        }
        self.charts(formula).into_iter().find_map(|chart| {
            let inside = chart.express(formula);
            if !chart.ends_hold(&self.dynamics, inside) {
                return None;
            }
            answer(&Equations::new(chart.system, chart.start), inside)
        })
    }

    /// Coordinates worth trying for a formula: the states, logarithms and reciprocals it takes, planned
    /// coordinates.
    fn charts(&self, formula: Expr) -> Vec<Chart<'_>> {
        let chart = |changes: &[Change]| Chart::new(&self.model, &self.dynamics.states, changes);
        let mut charts = vec![chart(&[])];
        let logarithms = coordinates::logarithms(&self.model, formula);
        let reciprocals = coordinates::reciprocals(&self.model, formula);
        for changes in [
            logarithms.as_slice(),
            reciprocals.as_slice(),
            self.changes.as_slice(),
        ] {
            if !changes.is_empty() {
                charts.push(chart(changes));
            }
        }
        charts
    }
}

/// The binomial coefficient, for small arguments.
fn binomial(n: u32, k: u32) -> i64 {
    (0..k).fold(1, |value, i| value * i64::from(n - i) / i64::from(i + 1))
}
