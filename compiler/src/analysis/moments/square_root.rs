//! The law of a square-root process at one time: noncentral chi-square (Feller 1951; Cox, Ingersoll and
//! Ross 1985, section 3).

use std::collections::BTreeMap;

use driftwright_runtime::Unfused;
use driftwright_runtime::gauss::moving_transition;
use driftwright_runtime::law::{ChiSquare, Law as _};
use driftwright_runtime::math::{exp, expm1_ratio};

use super::{ImageLaw, LawName, Moments};
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
        let below = below(&self.square_root_numbers(law, values, t)?, y)?;
        Some(if law.increasing { below } else { 1.0 - below })
    }

    pub(super) fn square_root_numbers(
        &self,
        law: &ImageLaw,
        values: &BTreeMap<Symbol, f64>,
        t: f64,
    ) -> Option<ChiSquare> {
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
        let noncentrality = start * decay / scale;
        Some(match process.at_zero {
            AtZero::NotReached | AtZero::Reflected => {
                ChiSquare::reflected(scale, dimension, noncentrality)
            }
            AtZero::Absorbed => ChiSquare::absorbed(scale, dimension, noncentrality),
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

/// `P(y <= level)`; none where the law does not exist or is too far out.
pub(super) fn below(law: &ChiSquare, level: f64) -> Option<f64> {
    Some(law.cdf(level)).filter(|p| !p.is_nan())
}
