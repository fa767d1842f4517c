//! The law of a square-root process at one time: noncentral chi-square (Feller 1951; Cox, Ingersoll and
//! Ross 1985, section 3).

use std::collections::BTreeMap;

use driftwright_runtime::Unfused;
use driftwright_runtime::math::{exp, expm1_ratio};

use super::{LawName, Moments, NormalLaw};
use crate::analysis::chi_square::noncentral_cdf;
use crate::analysis::free::{Freedom, free_of};
use crate::analysis::square_root::{AtZero, SquareRoot};
use crate::symbolic::{Expr, Symbol};

/// The law of a formula at one time, where its distribution function is known.
#[derive(Clone, Debug)]
pub enum MarginalLaw {
    /// Normal after a monotone map.
    Normal(NormalLaw),
    /// That of a square-root process after a monotone map.
    SquareRoot(SquareRootLaw),
}

impl MarginalLaw {
    /// Its name; none where it has one or another by the parameters' values.
    pub fn name(&self) -> Option<LawName> {
        match self {
            Self::Normal(law) => Some(law.name),
            Self::SquareRoot(law) => law.name,
        }
    }
}

/// A law that is a square-root process's after a strictly monotone map.
#[derive(Clone, Debug)]
pub struct SquareRootLaw {
    /// Its name; none where the parameters' values decide whether it has an atom.
    pub name: Option<LawName>,
    /// The symbol that stands for the formula's value in `forward`.
    variable: Symbol,
    /// The coordinate y as a function of that value.
    forward: Expr,
    /// Whether that increases.
    increasing: bool,
    /// The state, by its index in the model.
    state: usize,
}

/// The probability that a process which stays at the end of its domain has got there.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Atom {
    /// The probability.
    pub mass: f64,
    /// Whether it stands at the lower end of the formula's range.
    pub at_lower: bool,
}

impl Atom {
    /// The probability between the atom's end and the quantile of a level.
    pub fn share(self, level: f64) -> f64 {
        if self.at_lower { level } else { 1.0 - level }
    }
}

impl Moments {
    /// The name of the law of a formula at one time, where it is known.
    pub fn law(&self, formula: Expr) -> Option<LawName> {
        self.marginal_law(formula)?.name()
    }

    /// The law of a formula at one time, where it is known.
    pub fn marginal_law(&self, formula: Expr) -> Option<MarginalLaw> {
        let normal = self.normal_law(formula).map(MarginalLaw::Normal);
        normal.or_else(|| self.square_root_law(formula).map(MarginalLaw::SquareRoot))
    }

    /// `P(formula <= x)` at time `t` for given parameter values.
    pub fn marginal_cdf(
        &self,
        law: &MarginalLaw,
        x: f64,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        match law {
            MarginalLaw::Normal(law) => self.cdf(law, x, values, t),
            MarginalLaw::SquareRoot(law) => self.square_root_cdf(law, x, values, t),
        }
    }

    /// The atom of a law at the end of its range; of mass 0 for a continuous law.
    pub fn atom(&self, law: &MarginalLaw, values: &BTreeMap<Symbol, f64>, t: f64) -> Option<Atom> {
        let (mass, at_lower) = match law {
            MarginalLaw::Normal(_) => (0.0, true),
            MarginalLaw::SquareRoot(law) => {
                let numbers = self.square_root_numbers(law, values, t)?;
                let mass = if numbers.absorbing {
                    numbers.below(0.0)?
                } else {
                    0.0
                };
                (mass, law.increasing)
            }
        };
        Some(Atom { mass, at_lower })
    }

    fn square_root_of(&self, state: usize) -> Option<&SquareRoot> {
        self.square_roots.get(state)?.as_deref()
    }

    /// A state by itself, or an affine function of its coordinate.
    fn square_root_law(&self, formula: Expr) -> Option<SquareRootLaw> {
        let pool = &self.model.pool;
        let symbols = pool.symbols_of(formula);
        let mut states = symbols.iter().filter_map(|&s| self.model.state_of(s));
        let (state, None) = (states.next()?, states.next()) else {
            return None;
        };
        let law = self.square_root_of(state)?;
        let x = self.model.states[state].symbol;
        let along = pool.sign(pool.simplify(pool.derivative(law.coordinate.forward, x)));
        if formula == pool.var(x) {
            return Some(SquareRootLaw {
                name: self.square_root_name(law, law.is_affine(&self.model, state)),
                variable: x,
                forward: law.coordinate.forward,
                increasing: along.is_non_negative(),
                state,
            });
        }
        let free = |e: Expr| match free_of(pool, e, &[x]) {
            Freedom::Free(value) if !pool.depends_on(value, self.model.time) => Some(value),
            _ => None,
        };
        let y = law.coordinate.forward;
        let scale = free(pool.div(pool.derivative(formula, x), pool.derivative(y, x)))?;
        let shift = free(pool.sub(formula, pool.mul(scale, y)))?;
        let sign = pool.sign(scale);
        if !sign.is_non_zero() {
            return None;
        }
        let variable = self.value_symbol();
        Some(SquareRootLaw {
            name: self.square_root_name(law, true),
            variable,
            forward: pool.div(pool.sub(pool.var(variable), shift), scale),
            increasing: sign.is_positive(),
            state,
        })
    }

    fn square_root_name(&self, law: &SquareRoot, affine: bool) -> Option<LawName> {
        Some(match (law.has_atom(&self.model)?, affine) {
            (true, _) => LawName::AbsorbedNoncentralChiSquare,
            (false, true) => LawName::NoncentralChiSquare,
            (false, false) => LawName::TransformedNoncentralChiSquare,
        })
    }

    fn square_root_cdf(
        &self,
        law: &SquareRootLaw,
        x: f64,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<f64> {
        let mut at = values.clone();
        at.insert(self.model.time, t);
        at.insert(law.variable, x);
        let y = self.model.pool.eval_f64(law.forward, &at)?;
        let below = self.square_root_numbers(law, values, t)?.below(y)?;
        Some(if law.increasing { below } else { 1.0 - below })
    }

    fn square_root_numbers(
        &self,
        law: &SquareRootLaw,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<Numbers> {
        let (pool, process) = (&self.model.pool, self.square_root_of(law.state)?);
        let number = |e: Expr| pool.eval_f64(e, values).filter(|v| v.is_finite());
        let declared = &self.model.states[law.state];
        let start = BTreeMap::from([(declared.symbol, declared.initial.expr)]);
        let start = number(pool.substitute(process.coordinate.forward, &start))?;
        let (level, rate, square) = (
            number(process.level)?,
            number(process.rate)?,
            number(process.square)?,
        );
        let dimension = 4.0 * level / square;
        let scale = square / 4.0 * t * expm1_ratio::<Unfused>(-rate * t);
        Some(Numbers {
            dimension,
            scale,
            noncentrality: start * exp::<Unfused>(-rate * t) / scale,
            absorbing: match process.at_zero {
                AtZero::NotReached => false,
                AtZero::Reflected => dimension <= 0.0,
                AtZero::Absorbed => dimension < 2.0,
            },
        })
    }
}

/// The transition law of a square-root process as numbers.
struct Numbers {
    dimension: f64,
    scale: f64,
    noncentrality: f64,
    absorbing: bool,
}

impl Numbers {
    /// `P(y <= level)`. A process that is absorbed is above z times its scale with the probability that a
    /// chi-square variable of `2 - dimension` degrees and noncentrality z is below the process's own
    /// noncentrality (Schroder 1989, section 1, for constant elasticity).
    fn below(&self, level: f64) -> Option<f64> {
        if level < 0.0 {
            return Some(0.0);
        }
        let z = level / self.scale;
        if self.absorbing {
            return Some(1.0 - noncentral_cdf(self.noncentrality, 2.0 - self.dimension, z)?);
        }
        noncentral_cdf(z, self.dimension, self.noncentrality)
    }
}
