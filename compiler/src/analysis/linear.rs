//! Which states follow a linear Gaussian system, in coordinates of their own.
//!
//! With `u_i = F_i(x_i)` by Ito's rule `du_i = mu_i dt + sum_j c_ij dW_j`. The states whose `c_ij`
//! are constants and whose `mu_i` are `sum_j A_ij u_j + alpha_i` with constants `A`, `alpha` have a
//! Gaussian transition that can be drawn exactly. `A_ij` is read off as `(d mu_i/dx_j)/F_j'(x_j)`;
//! that it and the rest are constant is proved by algebra, never guessed, and the finished row is
//! compared once more, by normal form and by numbers.
//!
//! The largest set of such states is found by elimination: a state that fails takes with it those
//! whose drift needs it, and only those.

use std::collections::BTreeMap;

use super::coordinate::{Candidate, candidates};
use super::dependence::deterministic;
use super::free::{Freedom, free_of};
use super::noise::{constant_noise, why_no_coordinate};
use super::sample;
use crate::calculus::{Dynamics, Process, expand};
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Pool, Symbol};

/// A state whose coordinate is a row of a linear Gaussian system.
#[derive(Clone, Debug)]
pub struct Row {
    /// Its coordinate.
    pub coordinate: Candidate,
    /// Drift and diffusion of the coordinate, in the states.
    pub process: Process,
    /// The non-zero entries of its row of `A`, by state.
    pub slopes: BTreeMap<usize, Expr>,
    /// The constant part of its drift.
    pub constant: Expr,
    /// The coefficients of the drivers, constants.
    pub noise: Vec<Expr>,
    /// Ito's rule on the coordinate, step by step.
    pub trace: Trace,
}

/// For each state its row, or why it has none.
pub type Rows = Vec<Result<Row, String>>;

/// Finds the largest linear Gaussian system among the states.
///
/// `excluded` names states that must not take part, with the reason, such as an author's override.
pub fn find(model: &Model, dynamics: &Dynamics, excluded: &BTreeMap<usize, String>) -> Rows {
    let mut finder = Finder::new(model, dynamics, excluded);
    loop {
        let rows = finder.settle();
        match finder
            .confined(&rows)
            .or_else(|| finder.moving_correlation(&rows))
        {
            Some((state, reason)) => finder.exclude(state, reason),
            None => return rows,
        }
    }
}

/// Connected components of the states with rows: through `A` and through drivers that are shared or
/// correlated. Ascending, each ascending.
pub fn components(model: &Model, rows: &Rows) -> Vec<Vec<usize>> {
    let members: Vec<(usize, &Row)> = rows
        .iter()
        .enumerate()
        .filter_map(|(i, r)| Some((i, r.as_ref().ok()?)))
        .collect();
    let mut label: Vec<usize> = (0..rows.len()).collect();
    for &(i, left) in &members {
        for &(j, right) in &members {
            let joined = left.slopes.contains_key(&j) || noises_meet(model, left, right);
            if joined && label[i] != label[j] {
                let (keep, drop) = (label[i].min(label[j]), label[i].max(label[j]));
                label
                    .iter_mut()
                    .filter(|l| **l == drop)
                    .for_each(|l| *l = keep);
            }
        }
    }
    let mut found: BTreeMap<usize, Vec<usize>> = BTreeMap::new();
    for (i, _) in members {
        found.entry(label[i]).or_default().push(i);
    }
    found.into_values().collect()
}

fn noises_meet(model: &Model, left: &Row, right: &Row) -> bool {
    pairs(model, left, right).any(|rho| !model.pool.is_zero_literal(rho))
}

/// The correlations of the drivers of one row with those of another.
fn pairs<'a>(model: &'a Model, left: &'a Row, right: &'a Row) -> impl Iterator<Item = Expr> + 'a {
    let used = |row: &'a Row| {
        let noise = row.noise.iter().enumerate();
        noise
            .filter(|&(_, &c)| !model.pool.is_zero_literal(c))
            .map(|(j, _)| j)
    };
    used(left).flat_map(move |j| used(right).map(move |k| model.correlation[j][k]))
}

/// What is known of a state while the system is being found.
struct Entry {
    /// Candidates that make the noise constant, with that noise, the best first; or why there is none.
    options: Result<Vec<Choice>, String>,
    /// The candidate in use.
    active: usize,
}

/// A candidate with its Ito expansion.
struct Choice {
    coordinate: Candidate,
    process: Process,
    noise: Vec<Expr>,
    trace: Trace,
}

struct Finder<'a> {
    model: &'a Model,
    symbols: Vec<Symbol>,
    entries: Vec<Entry>,
}

impl<'a> Finder<'a> {
    fn new(model: &'a Model, dynamics: &Dynamics, excluded: &BTreeMap<usize, String>) -> Self {
        let symbols: Vec<Symbol> = model.states.iter().map(|s| s.symbol).collect();
        let entry = |i: usize| {
            let options = match excluded.get(&i) {
                Some(reason) => Err(reason.clone()),
                None => options(model, dynamics, &symbols, i),
            };
            Entry { options, active: 0 }
        };
        let entries = (0..model.states.len()).map(entry).collect();
        Self {
            model,
            symbols,
            entries,
        }
    }

    fn exclude(&mut self, state: usize, reason: String) {
        self.entries[state].options = Err(reason);
    }

    fn choice(&self, state: usize) -> Option<&Choice> {
        let entry = &self.entries[state];
        entry
            .options
            .as_ref()
            .ok()
            .map(|options| &options[entry.active])
    }

    /// Eliminates until every state left has a row.
    fn settle(&mut self) -> Rows {
        // Each round fixes a coordinate or drops a state; the bound only guards against states that
        // keep changing each other's coordinates.
        for _ in 0..3 * self.entries.len() + 2 {
            let rows: Rows = (0..self.entries.len())
                .map(|i| self.row_or_switch(i))
                .collect();
            let failures = self.drop_failures(&rows);
            let fresh: Rows = (0..self.entries.len()).map(|i| self.row(i)).collect();
            if !failures
                && fresh
                    .iter()
                    .zip(&self.entries)
                    .all(|(r, e)| r.is_ok() || e.options.is_err())
            {
                return fresh;
            }
        }
        let reason = "no choice of coordinates was found that suits all states at once";
        self.entries
            .iter()
            .map(|_| Err(reason.to_owned()))
            .collect()
    }

    fn drop_failures(&mut self, rows: &Rows) -> bool {
        let mut dropped = false;
        for (entry, row) in self.entries.iter_mut().zip(rows) {
            if let (Err(reason), Ok(_)) = (row, &entry.options) {
                entry.options = Err(reason.clone());
                dropped = true;
            }
        }
        dropped
    }

    /// The row of a state in the first of its coordinates that gives one, the active one before others.
    fn row_or_switch(&mut self, state: usize) -> Result<Row, String> {
        let count = self.entries[state].options.as_ref().map_or(0, Vec::len);
        let first = self.row(state);
        if first.is_ok() {
            return first;
        }
        let before = self.entries[state].active;
        for other in (0..count).filter(|&k| k != before) {
            self.entries[state].active = other;
            let row = self.row(state);
            if row.is_ok() {
                return row;
            }
        }
        self.entries[state].active = before;
        first
    }

    /// The row of a state in its active coordinate, given the others' active coordinates.
    fn row(&self, state: usize) -> Result<Row, String> {
        let pool = &self.model.pool;
        let choice = match &self.entries[state].options {
            Ok(options) => &options[self.entries[state].active],
            Err(reason) => return Err(reason.clone()),
        };
        let drift = choice.process.drift;
        let shown = self.shown(choice);
        let mentioned = self.mentioned(drift);
        if !mentioned.is_empty() && pool.has_kink(drift).is_some() {
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
                    "the drift of {shown} depends on {name}, which is not part of an exact law"
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

    /// `e` as a formula in the parameters alone, or why it is none.
    fn constant(&self, e: Expr, refusal: impl Fn(&str) -> String) -> Result<Expr, String> {
        let pool = &self.model.pool;
        match free_of(pool, e, &self.symbols) {
            Freedom::DependsOn(symbol) => Err(refusal(&pool.symbol_name(symbol))),
            Freedom::CannotTell(symbol) => Err(format!(
                "{} (this could not be decided)",
                refusal(&pool.symbol_name(symbol))
            )),
            Freedom::Free(value) if pool.depends_on(value, self.model.time) => Err(format!(
                "the coefficient {} depends on time; exact transitions are drawn for constant coefficients",
                pool.format(value)
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
            pool.equal(left, right).is_yes() && sample::agree(pool, left, right)
        });
        if proved {
            Ok(())
        } else {
            Err(format!(
                "the linear form of {shown} could not be verified by Ito's rule"
            ))
        }
    }

    fn mentioned(&self, e: Expr) -> Vec<usize> {
        let pool = &self.model.pool;
        (0..self.symbols.len())
            .filter(|&j| pool.depends_on(e, self.symbols[j]))
            .collect()
    }

    fn shown(&self, choice: &Choice) -> String {
        self.model.pool.format(choice.coordinate.forward)
    }

    /// A state with a Gaussian coordinate that its domain cannot hold.
    fn confined(&self, rows: &Rows) -> Option<(usize, String)> {
        let reached = reached(&self.model.pool, rows);
        let (state, row) = rows.iter().enumerate().find_map(|(i, row)| {
            let row = row.as_ref().ok()?;
            (reached[i] && !row.coordinate.onto_line).then_some((i, row))
        })?;
        let shown = self.model.pool.format(row.coordinate.forward);
        Some((
            state,
            format!(
                "{shown} would be Gaussian, and a Gaussian variable leaves the domain of {}: the closed form \
             holds only until the first exit",
                self.model.states[state].name
            ),
        ))
    }

    /// A state of a group in which a correlation changes with time.
    fn moving_correlation(&self, rows: &Rows) -> Option<(usize, String)> {
        let (pool, time) = (&self.model.pool, self.model.time);
        for group in components(self.model, rows) {
            let members = || {
                group
                    .iter()
                    .filter_map(|&i| Some((i, rows[i].as_ref().ok()?)))
            };
            for (i, left) in members() {
                for (_, right) in members() {
                    if let Some(rho) =
                        pairs(self.model, left, right).find(|&r| pool.depends_on(r, time))
                    {
                        let rho = pool.format(rho);
                        return Some((
                            i,
                            format!(
                                "the correlation {rho} of its drivers depends on time; exact transitions are \
                             drawn for constant correlations"
                            ),
                        ));
                    }
                }
            }
        }
        None
    }
}

/// Which rows noise reaches, directly or through the drift.
pub fn reached(pool: &Pool, rows: &Rows) -> Vec<bool> {
    let noisy = |row: &Row| row.noise.iter().any(|&c| !pool.is_zero_literal(c));
    let mut reached: Vec<bool> = rows
        .iter()
        .map(|row| row.as_ref().is_ok_and(noisy))
        .collect();
    loop {
        let before = reached.clone();
        for (i, row) in rows.iter().enumerate() {
            if let Ok(row) = row {
                reached[i] |= row.slopes.keys().any(|&j| before[j]);
            }
        }
        if reached == before {
            return reached;
        }
    }
}

/// The coordinates of a state that make its noise constant.
fn options(
    model: &Model,
    dynamics: &Dynamics,
    symbols: &[Symbol],
    state: usize,
) -> Result<Vec<Choice>, String> {
    let declared = &model.states[state];
    let noise = &dynamics.states[state].diffusion;
    let pool = &model.pool;
    let others: Vec<Symbol> = symbols
        .iter()
        .copied()
        .filter(|&s| s != declared.symbol)
        .collect();
    let own = noise
        .iter()
        .copied()
        .find(|&b| !pool.is_zero_literal(b) && !others.iter().any(|&s| pool.depends_on(b, s)));
    let mut found = candidates(model, declared, own);
    if deterministic(model, dynamics)[state] {
        // Nothing random reaches it, so it need not live on the whole line: itself first.
        found.sort_by_key(|c| !c.is_identity());
    }
    let choices: Vec<Choice> = found
        .into_iter()
        .filter_map(|coordinate| {
            let noise = constant_noise(pool, noise, &coordinate, declared.symbol, symbols)?;
            let expansion = expand(model, &dynamics.states, coordinate.forward);
            let process = Process {
                drift: expansion.drift,
                diffusion: expansion.diffusion,
            };
            Some(Choice {
                coordinate,
                process,
                noise,
                trace: expansion.trace,
            })
        })
        .collect();
    if choices.is_empty() {
        Err(why_no_coordinate(model, state, noise))
    } else {
        Ok(choices)
    }
}
