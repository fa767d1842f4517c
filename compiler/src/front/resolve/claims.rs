//! Claims.

use super::super::raw::{RawClaim, RawClaimKind, RawFormula, RawModel};
use super::Resolver;
use super::place::Place;
use crate::model::{Claim, ClaimKind, Formula};

impl Resolver<'_> {
    /// `[claims]`, without those at fault.
    pub(super) fn claims(&mut self, raw: &RawModel) -> Vec<Claim> {
        raw.claims
            .iter()
            .filter_map(|claim| {
                let kind = self.claim(raw, claim)?;
                Some(Claim {
                    name: claim.name.text.clone(),
                    kind,
                    span: claim.span,
                })
            })
            .collect()
    }

    fn claim(&mut self, raw: &RawModel, claim: &RawClaim) -> Option<ClaimKind> {
        Some(match &claim.kind {
            RawClaimKind::Drift { of, is } => {
                let (of, is) = self.both(of, Place::ClaimedDynamics, is, Place::DynamicsValue)?;
                ClaimKind::DriftOf { of, is }
            }
            RawClaimKind::Diffusion { of, is } => {
                let of = self.claimed(of, Place::ClaimedDynamics);
                let is = self.per_driver(&raw.drivers, is, Place::DynamicsValue, claim.name.span);
                ClaimKind::DiffusionOf { of: of?, is }
            }
            RawClaimKind::Martingale { of } => ClaimKind::Martingale {
                of: self.claimed(of, Place::ClaimedDynamics)?,
            },
            RawClaimKind::Mean { of, is } => {
                let (of, is) = self.both(of, Place::ClaimedMoment, is, Place::MomentValue)?;
                ClaimKind::MeanOf { of, is }
            }
            RawClaimKind::Variance { of, is } => {
                let (of, is) = self.both(of, Place::ClaimedMoment, is, Place::MomentValue)?;
                ClaimKind::VarianceOf { of, is }
            }
            RawClaimKind::Covariance {
                of: [first, second],
                is,
            } => {
                let first = self.claimed(first, Place::ClaimedMoment);
                let (second, is) =
                    self.both(second, Place::ClaimedMoment, is, Place::MomentValue)?;
                ClaimKind::CovarianceOf {
                    of: [first?, second],
                    is,
                }
            }
            RawClaimKind::Law { of, is } => ClaimKind::LawOf {
                of: self.claimed(of, Place::ClaimedMoment)?,
                is: is.clone(),
            },
        })
    }

    fn claimed(&mut self, raw: &RawFormula, place: Place) -> Option<Formula> {
        self.scope.formula(raw, place, self.diagnostics)
    }

    fn both(
        &mut self,
        of: &RawFormula,
        of_place: Place,
        is: &RawFormula,
        is_place: Place,
    ) -> Option<(Formula, Formula)> {
        let of = self.claimed(of, of_place);
        let is = self.claimed(is, is_place);
        Some((of?, is?))
    }
}
