//! Growth of coefficients, commuting noise, closed systems of moments.

use super::{Fact, Finder, Topic, plain};
use crate::analysis::asymptotics::{Leading, Side, at_end};
use crate::analysis::boundary::{End, bound, classify};
use crate::analysis::commute::clash;
use crate::analysis::condition::{Condition, Standing, all_standing};
use crate::analysis::dependence::mentioned;
use crate::analysis::end_rules::ruled;
use crate::analysis::moments::grows_linearly;
use crate::calculus::covariation;
use crate::symbolic::{Bound, Expr, Rational};

/// States beyond which the degrees of joint moments are not looked at.
const MAX_STATES: usize = 40;

impl Finder<'_> {
    /// Whether coefficients grow at most linearly: for the states of which that is proved together, for each other
    /// state that can grow by itself.
    pub(super) fn growth(&self) -> Vec<Fact> {
        let (linear, others): (Vec<usize>, Vec<usize>) = (0..self.model.states.len())
            .filter(|&i| self.is_unbounded(i))
            .partition(|&i| grows_linearly(&self.system, i));
        let mut facts = Vec::new();
        if !linear.is_empty() {
            let because =
                "then all moments are finite on finite horizons; Khasminskii 2012, theorem 3.5";
            facts.push(plain(
                Topic::Growth,
                linear.clone(),
                grow(&self.names(&linear)),
                Standing::Implied,
                because,
            ));
        }
        facts.extend(others.into_iter().map(|i| self.growth_of(i)));
        facts
    }

    fn is_unbounded(&self, state: usize) -> bool {
        let domain = self.model.states[state].domain;
        domain.lower == Bound::Infinite || domain.upper == Bound::Infinite
    }

    fn growth_of(&self, state: usize) -> Fact {
        let process = &self.dynamics.states[state];
        let statement = grow(self.name(state));
        let coefficients = std::iter::once(&process.drift).chain(&process.diffusion);
        let mut conditions = Vec::new();
        for &coefficient in coefficients {
            match self.powers(state, coefficient) {
                Some(powers) => conditions.extend(powers),
                None => {
                    let because = "no bound was found on a coefficient that reads other states, or no leading term";
                    return plain(
                        Topic::Growth,
                        vec![state],
                        statement,
                        Standing::Open,
                        because,
                    );
                }
            }
        }
        let pool = &self.model.pool;
        let standing = all_standing(self.model, &conditions);
        let because = match standing {
            Standing::Contradicted => {
                "moments of the explicit Euler and Milstein schemes in the state itself diverge; Hutzenthaler, Jentzen and Kloeden 2011"
            }
            _ => "powers of the state, towards infinity",
        };
        let numbers = conditions
            .iter()
            .all(|c| pool.symbols_of(c.right).is_empty());
        let mut fact = plain(Topic::Growth, vec![state], statement, standing, because);
        if !numbers {
            conditions.retain(|c| !pool.symbols_of(c.right).is_empty());
            conditions.dedup();
            let written = conditions.iter().map(|c| c.written(pool)).collect();
            fact.condition = Some(vec![written]);
        }
        fact
    }

    /// What must hold for a function of one state to grow at most linearly at its infinite ends; none where the rules
    /// do not say.
    fn powers(&self, state: usize, e: Expr) -> Option<Vec<Condition>> {
        let (pool, x) = (&self.model.pool, self.model.states[state].symbol);
        if mentioned(self.model, e).into_iter().any(|j| j != state) {
            return None;
        }
        let at_most_one = |power: Expr| Condition::at_least(pool.one(), power);
        let mut found = Vec::new();
        for side in [Side::Lower, Side::Upper] {
            if bound(self.model, state, side) != Bound::Infinite {
                continue;
            }
            match at_end(pool, e, x, Bound::Infinite, side) {
                Leading::Zero => {}
                Leading::Term { exponent, .. } => found.push(at_most_one(pool.number(-exponent))),
                Leading::Unknown => {
                    let slope = pool.div(pool.derivative(e, x), e);
                    let power = pool.simplify(pool.mul(pool.var(x), slope));
                    (!pool.depends_on(power, x)).then(|| found.push(at_most_one(power)))?;
                }
            }
        }
        Some(found)
    }

    /// Whether the noise commutes, for models with several drivers.
    pub(super) fn commutativity(&self) -> Vec<Fact> {
        if self.model.drivers.len() < 2 {
            return Vec::new();
        }
        let random = |&i: &usize| {
            let noise = &self.dynamics.states[i].diffusion;
            noise.iter().any(|&b| !self.model.pool.is_zero_literal(b))
        };
        let states: Vec<usize> = (0..self.model.states.len()).filter(random).collect();
        let found = |&i: &usize| {
            Some((
                i,
                clash(
                    self.model,
                    self.dynamics,
                    &self.dynamics.states[i].diffusion,
                )?,
            ))
        };
        let clashes: Vec<_> = states.iter().filter_map(found).collect();
        if clashes.is_empty() {
            let because =
                "L^j b^k = L^k b^j for all pairs of drivers: increments alone give strong order 1";
            let statement = "the noise commutes".to_owned();
            return vec![plain(
                Topic::Commutativity,
                states,
                statement,
                Standing::Implied,
                because,
            )];
        }
        clashes
            .into_iter()
            .map(|(i, clash)| {
                let drivers = &self.model.drivers;
                let (first, second) = (&drivers[clash.first].name, &drivers[clash.second].name);
                let statement = format!("the noises of {first} and {second} commute in {}", self.name(i));
                let difference = self.model.pool.format(clash.difference);
                let because = format!(
                    "L^{first} b^{second} - L^{second} b^{first} = {difference}: strong order 1 needs Levy areas"
                );
                let standing = match clash.certain {
                    true => Standing::Contradicted,
                    false => Standing::Open,
                };
                plain(Topic::Commutativity, vec![i], statement, standing, because)
            })
            .collect()
    }

    /// The states whose moments of every order solve closed linear systems, and those whose moments do not.
    pub(super) fn closed_moments(&self) -> Vec<Fact> {
        let all: Vec<(usize, Standing)> = (0..self.model.states.len())
            .map(|i| (i, self.is_polynomial(i)))
            .collect();
        let with = |standing| -> Vec<usize> {
            let chosen = all.iter().filter(|(_, s)| *s == standing);
            chosen.map(|&(i, _)| i).collect()
        };
        let fact = |standing, because: &str| {
            let states = with(standing);
            let kind = if states.len() == 1 {
                "is a polynomial process"
            } else {
                "are polynomial processes"
            };
            let statement = format!("{} {kind}", self.names(&states));
            (!states.is_empty())
                .then(|| plain(Topic::Moments, states, statement, standing, because))
        };
        [
            fact(
                Standing::Implied,
                "drifts of degree 1 and covariations of degree 2 in the states they depend on, so that moments of every order \
                 solve closed linear equations; Cuchiero, Keller-Ressel and Teichmann 2012",
            ),
            fact(
                Standing::Contradicted,
                "a drift is of higher degree than 1, or a covariation of higher degree than 2",
            ),
            fact(
                Standing::Open,
                "a coefficient is not known to be a polynomial in the states, or an end that absorbs or reflects acts",
            ),
        ]
        .into_iter()
        .flatten()
        .collect()
    }

    fn is_polynomial(&self, state: usize) -> Standing {
        let states = self
            .system
            .closure([self.model.pool.var(self.model.states[state].symbol)]);
        if states.len() > MAX_STATES {
            return Standing::Open;
        }
        let acts = |&i: &usize| {
            ruled(self.model, i)
                .any(|rule| classify(self.model, self.dynamics, i, rule.side) != End::NotReached)
        };
        let mut standing = match states.iter().any(acts) {
            true => Standing::Open,
            false => Standing::Implied,
        };
        for (position, &i) in states.iter().enumerate() {
            let drift = (self.dynamics.states[i].drift, 1);
            let pairs = states[position..]
                .iter()
                .map(|&j| (covariation(self.model, &self.dynamics.states, i, j), 2));
            for (e, most) in std::iter::once(drift).chain(pairs) {
                match self.degree_at_most(e, most) {
                    Standing::Contradicted => return Standing::Contradicted,
                    Standing::Open => standing = Standing::Open,
                    Standing::Implied => {}
                }
            }
        }
        standing
    }

    /// Whether a formula is a polynomial of at most this degree in the states; refuted only for polynomials and powers.
    fn degree_at_most(&self, e: Expr, most: u32) -> Standing {
        let pool = &self.model.pool;
        let states = mentioned(self.model, e);
        let symbols: Vec<_> = states
            .iter()
            .map(|&i| self.model.states[i].symbol)
            .collect();
        let Some(coefficients) = pool.polynomial_in(e, &symbols) else {
            return self.not_a_polynomial(&states, e, most);
        };
        let high = coefficients
            .into_iter()
            .filter(|(powers, _)| powers.iter().sum::<u32>() > most);
        let mut standing = Standing::Implied;
        for (_, coefficient) in high {
            if pool.is_zero(coefficient).is_no() {
                return Standing::Contradicted;
            }
            standing = Standing::Open;
        }
        standing
    }

    /// A power of one state that is no whole number, or too large a one.
    fn not_a_polynomial(&self, states: &[usize], e: Expr, most: u32) -> Standing {
        let (pool, &[state]) = (&self.model.pool, states) else {
            return Standing::Open;
        };
        let x = self.model.states[state].symbol;
        let slope = pool.div(pool.derivative(e, x), e);
        let power = pool.simplify(pool.mul(pool.var(x), slope));
        match pool.as_number(power) {
            Some(n) if !n.is_int() || n < Rational::ZERO || n > Rational::from(most) => {
                Standing::Contradicted
            }
            _ => Standing::Open,
        }
    }
}

fn grow(names: &str) -> String {
    format!("drift and noise of {names} grow at most linearly")
}
