//! The law of a square-root process at one time: noncentral chi-square (Feller 1951; Cox, Ingersoll and
//! Ross 1985, section 3).

use std::collections::BTreeMap;

use driftwright_runtime::Unfused;
use driftwright_runtime::gauss::moving_transition;
use driftwright_runtime::math::{exp, expm1_ratio};

use super::{ImageLaw, LawName, Moments};
use crate::analysis::chi_square::noncentral_cdf;
use crate::analysis::square_root::{AtZero, SquareRoot};
use crate::symbolic::{Expr, Symbol};

impl Moments {
    fn square_root_of(&self, state: usize) -> Option<&SquareRoot> {
        self.square_roots.get(state)?.as_deref()
    }

    /// A state by itself, or an affine function of its coordinate.
    pub(super) fn square_root_law(&self, formula: Expr) -> Option<ImageLaw> {
        let state = self.only_state(formula)?;
        let law = self.square_root_of(state)?;
        let (image, affine) = self.image(formula, state, law.coordinate.forward)?;
        Some(ImageLaw {
            name: self.square_root_name(
                law,
                affine
                    || law
                        .coordinate
                        .is_affine(&self.model.pool, self.model.states[state].symbol),
            ),
            ..image
        })
    }

    fn square_root_name(&self, law: &SquareRoot, affine: bool) -> Option<LawName> {
        Some(match (law.has_atom(&self.model)?, affine) {
            (true, _) => LawName::AbsorbedNoncentralChiSquare,
            (false, true) => LawName::NoncentralChiSquare,
            (false, false) => LawName::TransformedNoncentralChiSquare,
        })
    }

    pub(super) fn square_root_cdf(
        &self,
        law: &ImageLaw,
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

    pub(super) fn square_root_numbers(
        &self,
        law: &ImageLaw,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<Numbers> {
        let (pool, process) = (&self.model.pool, self.square_root_of(law.state)?);
        let number = |e: Expr| pool.eval_f64(e, values).filter(|v| v.is_finite());
        let declared = &self.model.states[law.state];
        let start = BTreeMap::from([(declared.symbol, declared.initial.expr)]);
        let start = number(pool.substitute(process.coordinate.forward, &start))?;
        let dimension = number(process.dimension)?;
        let (decay, scale) = match process.moving {
            true => self.moving_window(process, values, t)?,
            false => {
                let (rate, square) = (number(process.rate)?, number(process.square)?);
                let scale = square / 4.0 * t * expm1_ratio::<Unfused>(-rate * t);
                (exp::<Unfused>(-rate * t), scale)
            }
        };
        Some(Numbers {
            dimension,
            scale,
            noncentrality: start * decay / scale,
            absorbing: match process.at_zero {
                AtZero::NotReached => false,
                AtZero::Reflected => dimension <= 0.0,
                AtZero::Absorbed => dimension < 2.0,
            },
        })
    }
}

impl Moments {
    /// What is left of the initial value at time t, and the scale of the law, where coefficients depend on time.
    fn moving_window(
        &self,
        process: &SquareRoot,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<(f64, f64)> {
        let pool = &self.model.pool;
        let evaluate = |instant: f64, out: &mut [f64]| {
            let mut at = values.clone();
            at.insert(self.model.time, instant);
            let number = |e: Expr| pool.eval_f64(e, &at).unwrap_or(f64::NAN);
            out.copy_from_slice(&[-number(process.rate), number(process.square) / 4.0, 0.0]);
        };
        let (mut decay, mut scale, mut spread) = ([0.0], [0.0], [0.0]);
        moving_transition(1, 0.0, t, evaluate, &mut decay, &mut scale, &mut spread).ok()?;
        Some((decay[0], scale[0]))
    }
}

/// The transition law of a square-root process as numbers.
pub(super) struct Numbers {
    dimension: f64,
    scale: f64,
    noncentrality: f64,
    pub(super) absorbing: bool,
}

impl Numbers {
    /// `P(y <= level)`. A process that is absorbed is above z times its scale with the probability that a
    /// chi-square variable of `2 - dimension` degrees and noncentrality z is below the process's own
    /// noncentrality (Schroder 1989, section 1, for constant elasticity).
    pub(super) fn below(&self, level: f64) -> Option<f64> {
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
