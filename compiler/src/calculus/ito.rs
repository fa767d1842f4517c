//! Ito's rule for a function of time and any number of states under correlated drivers.

use super::{Expansion, Process, System};
use crate::model::Model;
use crate::symbolic::trace::Trace;
use crate::symbolic::{Expr, Pool};

/// Instantaneous covariation `d<X_i, X_j>/dt = (B R B')_ij` of two states.
pub fn covariation(model: &Model, states: &[Process], i: usize, j: usize) -> Expr {
    bracket(model, &states[i].diffusion, &states[j].diffusion)
}

/// `sum_jk b_j R_jk c_k`: the covariation rate of two processes with diffusions `b` and `c`.
pub fn bracket(model: &Model, b: &[Expr], c: &[Expr]) -> Expr {
    let pool = &model.pool;
    let nonzero = |row: &[Expr]| -> Vec<(usize, Expr)> {
        row.iter()
            .copied()
            .enumerate()
            .filter(|&(_, e)| !pool.is_zero_literal(e))
            .collect()
    };
    let (b, c) = (nonzero(b), nonzero(c));
    let correlation = &model.correlation;
    let terms = b.iter().flat_map(|&(j, left)| {
        c.iter()
            .map(move |&(k, right)| pool.product([left, correlation[j][k], right]))
    });
    pool.sum(terms.collect::<Vec<_>>())
}

/// Ito's rule for a function of the model's states: see [`System::expand`].
///
/// `states` are the Ito processes of the states, in the model's order.
pub fn expand(model: &Model, states: &[Process], formula: Expr) -> Expansion {
    System::of_states(model, states).expand(formula)
}

impl System<'_> {
    /// The generator applied to a formula, time derivative included: the Ito drift, not simplified.
    pub fn generator(&self, formula: Expr) -> Expr {
        let rule = Rule::new(self, formula);
        self.pool().add(rule.first_order(), rule.second_order())
    }

    /// The coefficients of the drivers in a formula's differential, one per driver, not simplified.
    pub fn noise(&self, formula: Expr) -> Vec<Expr> {
        let rule = Rule::new(self, formula);
        (0..self.model.drivers.len())
            .map(|j| rule.diffusion(j))
            .collect()
    }

    /// Ito's rule: `dF = (F_t + sum_i F_i a_i + 1/2 sum_ij F_ij (B R B')_ij) dt + sum_j (sum_i F_i B_ij) dW_j`
    /// (Ito 1951; Karatzas and Shreve 1991, section 3.3).
    ///
    /// The parts come out simplified, and the trace holds each step in the order of the working.
    pub fn expand(&self, formula: Expr) -> Expansion {
        let rule = Rule::new(self, formula);
        let pool = self.pool();
        let mut trace = Trace::default();
        rule.log_derivatives(&mut trace);
        let (first, second) = (rule.first_order(), rule.second_order());
        let chain_rule_drift = pool.simplify(first);
        log(
            &mut trace,
            "chain rule",
            "time derivative plus first derivatives times drifts",
            Some(first),
            chain_rule_drift,
        );
        let ito_correction = pool.simplify(second);
        let note = if rule.second.is_empty() {
            "every second derivative that could meet noise is zero: no correction"
        } else {
            "half the second derivatives times the covariations"
        };
        log(
            &mut trace,
            "Ito correction",
            note,
            Some(second),
            ito_correction,
        );
        let sum = pool.add(chain_rule_drift, ito_correction);
        let drift = pool.simplify(sum);
        log(
            &mut trace,
            "drift",
            "both parts collected",
            Some(sum),
            drift,
        );
        let diffusion = rule.log_diffusion(&mut trace);
        Expansion {
            formula,
            chain_rule_drift,
            ito_correction,
            drift,
            diffusion,
            trace,
        }
    }
}

/// The derivatives and covariations that one application of the rule needs.
struct Rule<'a> {
    system: &'a System<'a>,
    /// `F_t`.
    time: Expr,
    /// `(i, F_i)` for the states that occur.
    first: Vec<(usize, Expr)>,
    /// `(i, j, F_ij, (B R B')_ij)` with `i <= j`, where neither factor is literally zero.
    second: Vec<(usize, usize, Expr, Expr)>,
}

impl<'a> Rule<'a> {
    fn new(system: &'a System<'a>, formula: Expr) -> Self {
        let pool = system.pool();
        let derivative = |i: usize| pool.derivative(formula, system.symbols[i]);
        let first: Vec<(usize, Expr)> = system
            .occurring(formula)
            .into_iter()
            .map(|i| (i, derivative(i)))
            .collect();
        let mut second = Vec::new();
        for (position, &(i, slope)) in first.iter().enumerate() {
            for &(j, _) in &first[position..] {
                let symbol = system.symbols[j];
                if !pool.depends_on(slope, symbol) {
                    continue;
                }
                let curvature = pool.derivative(slope, symbol);
                let (b, c) = (
                    &system.processes[i].diffusion,
                    &system.processes[j].diffusion,
                );
                let rate = bracket(system.model, b, c);
                if !pool.is_zero_literal(curvature) && !pool.is_zero_literal(rate) {
                    second.push((i, j, curvature, rate));
                }
            }
        }
        let time = pool.derivative(formula, system.model.time);
        Self {
            system,
            time,
            first,
            second,
        }
    }

    fn pool(&self) -> &'a Pool {
        self.system.pool()
    }

    fn first_order(&self) -> Expr {
        let pool = self.pool();
        let moved = self
            .first
            .iter()
            .map(|&(i, slope)| pool.mul(slope, self.system.processes[i].drift));
        pool.sum(std::iter::once(self.time).chain(moved).collect::<Vec<_>>())
    }

    fn second_order(&self) -> Expr {
        let pool = self.pool();
        let half = pool.ratio(1, 2);
        let terms = self.second.iter().map(|&(i, j, curvature, rate)| {
            // F_ij and F_ji both count, so the half stays on the diagonal only.
            let weight = if i == j { half } else { pool.one() };
            pool.product([weight, curvature, rate])
        });
        pool.sum(terms.collect::<Vec<_>>())
    }

    fn diffusion(&self, driver: usize) -> Expr {
        let pool = self.pool();
        let coefficient = |i: usize| self.system.processes[i].diffusion[driver];
        let terms = self
            .first
            .iter()
            .filter(|&&(i, _)| !pool.is_zero_literal(coefficient(i)))
            .map(|&(i, slope)| pool.mul(slope, coefficient(i)));
        pool.sum(terms.collect::<Vec<_>>())
    }

    fn log_diffusion(&self, trace: &mut Trace) -> Vec<Expr> {
        let pool = self.pool();
        let drivers = self.system.model.drivers.iter().enumerate();
        drivers
            .map(|(j, driver)| {
                let raw = self.diffusion(j);
                let simple = pool.simplify(raw);
                if !pool.is_zero_literal(raw) {
                    let note = format!("coefficient of d{}", driver.name);
                    log(trace, "diffusion", note, Some(raw), simple);
                }
                simple
            })
            .collect()
    }

    fn log_derivatives(&self, trace: &mut Trace) {
        let pool = self.pool();
        let name = |i: usize| pool.symbol_name(self.system.symbols[i]);
        if !pool.is_zero_literal(self.time) {
            let simple = pool.simplify(self.time);
            log(trace, "time derivative", "d/dt", None, simple);
        }
        for &(i, slope) in &self.first {
            let note = format!("d/d{}", name(i));
            log(trace, "first derivative", note, None, pool.simplify(slope));
        }
        for &(i, j, curvature, rate) in &self.second {
            let (x, y) = (name(i), name(j));
            let note = if i == j {
                format!("d^2/d{x}^2")
            } else {
                format!("d^2/d{x} d{y}")
            };
            log(
                trace,
                "second derivative",
                note,
                None,
                pool.simplify(curvature),
            );
            let note = format!("d<{x}, {y}>/dt");
            let simple = pool.simplify(rate);
            log(trace, "covariation", note, Some(rate), simple);
        }
    }
}

pub(super) fn log(
    trace: &mut Trace,
    rule: &'static str,
    note: impl Into<String>,
    before: Option<Expr>,
    after: Expr,
) {
    trace.push(rule, note, before.filter(|&b| b != after), after);
}
