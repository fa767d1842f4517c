//! The loops of a step.
//!
//! A draw from another law than the normal is one call for all lanes, so that it parts the loop over
//! lanes in two: what it needs is computed before, what needs it after. What a later loop reads of an
//! earlier one is kept in a lane.

use std::collections::{BTreeMap, BTreeSet};

use proc_macro2::{Literal, TokenStream};
use quote::quote;

use super::Generator;
use super::spell::{Place, has_statement};
use crate::program::{Op, Program, Rate, ValueId};

/// In which loop each lane value of a step is computed.
pub(super) struct Stages {
    /// By value; a draw's is the first loop that may read it.
    stage: BTreeMap<ValueId, usize>,
    /// The values that a later loop, a draw or the end of the step reads out of a lane.
    kept: BTreeSet<ValueId>,
    last: usize,
}

impl Stages {
    pub(super) fn new(program: &Program) -> Self {
        let mut stage: BTreeMap<ValueId, usize> = BTreeMap::new();
        for id in program.section(Rate::StepLane) {
            let op = &program.value(id).op;
            let ready = op.operands().iter().filter_map(|o| stage.get(o)).max();
            let call = usize::from(matches!(op, Op::Draw { .. }));
            stage.insert(id, ready.copied().unwrap_or(0) + call);
        }
        let last = stage.values().copied().max().unwrap_or(0);
        let mut kept = BTreeSet::new();
        for id in program.section(Rate::StepLane) {
            let op = &program.value(id).op;
            let drawn = matches!(op, Op::Draw { .. });
            let earlier = |o: &ValueId| drawn || stage.get(o).is_some_and(|&s| s < stage[&id]);
            kept.extend(op.operands().into_iter().filter(earlier));
            kept.extend(drawn.then_some(id));
        }
        kept.extend(
            program
                .slots
                .iter()
                .map(|s| s.next)
                .filter(|next| stage.get(next).is_some_and(|&s| s < last)),
        );
        kept.retain(|id| stage.contains_key(id) && !is_lane_already(program, *id));
        Self { stage, kept, last }
    }

    /// The values that stand in a lane of their own.
    pub(super) fn kept(&self) -> impl Iterator<Item = ValueId> + '_ {
        self.kept.iter().copied()
    }
}

/// A slot, a normal draw, a correlated one or an area: it stands in a lane before the first loop.
fn is_lane_already(program: &Program, id: ValueId) -> bool {
    matches!(
        program.value(id).op,
        Op::State(_) | Op::Noise(_) | Op::Extract(..)
    )
}

impl Generator<'_> {
    /// The loops of a step and the draws between them; `writes` ends the last loop.
    pub(super) fn loops(&self, writes: &TokenStream) -> TokenStream {
        let stages = Stages::new(self.program);
        let mut tokens = TokenStream::new();
        for id in stages.kept() {
            let lane = self.names.lane(id);
            tokens.extend(quote! { let mut #lane = runtime::Lane::ZERO; });
        }
        for stage in 0..=stages.last {
            let body = self.stage(&stages, stage);
            let end = if stage == stages.last {
                writes.clone()
            } else {
                TokenStream::new()
            };
            let draws = self.draws_after(&stages, stage);
            // What nothing computes needs no loop.
            if body.is_empty() && end.is_empty() {
                tokens.extend(draws);
                continue;
            }
            tokens.extend(quote! {
                for lane in 0..runtime::LANES {
                    #body
                    #end
                }
                #draws
            });
        }
        tokens
    }

    /// What one loop computes, after it has read what it needs of the loops before.
    fn stage(&self, stages: &Stages, stage: usize) -> TokenStream {
        let program = self.program;
        let computed = |id: &ValueId| {
            let op = &program.value(*id).op;
            let call = matches!(op, Op::Draw { .. }) || op.lanes() > 0;
            stages.stage[id] == stage && has_statement(op) && !call
        };
        let here: Vec<ValueId> = program.section(Rate::StepLane).filter(computed).collect();
        let mut read: BTreeSet<ValueId> = here
            .iter()
            .filter(|&&id| !is_lane_already(program, id))
            .flat_map(|&id| program.value(id).op.operands())
            .collect();
        if stage == stages.last {
            read.extend(program.slots.iter().map(|s| s.next));
        }
        let mut tokens = TokenStream::new();
        for id in program.section(Rate::StepLane) {
            if is_lane_already(program, id) {
                if read.contains(&id) {
                    tokens.extend(self.statements(std::iter::once(id), Place::Lanes));
                }
            } else if here.contains(&id) {
                tokens.extend(self.statements(std::iter::once(id), Place::Lanes));
                if stages.kept.contains(&id) {
                    let (lane, value) = (self.names.lane(id), self.read(id));
                    tokens.extend(quote! { #lane.0[lane] = #value; });
                }
            } else if read.contains(&id) {
                let (lane, name) = (self.names.lane(id), self.names.value(id));
                tokens.extend(quote! { let #name = #lane.0[lane]; });
            }
        }
        tokens
    }

    /// The draws whose parameters one loop has finished.
    fn draws_after(&self, stages: &Stages, stage: usize) -> TokenStream {
        let program = self.program;
        let mut tokens = TokenStream::new();
        for id in program.section(Rate::StepLane) {
            let Op::Draw {
                law,
                source,
                parameter,
            } = program.value(id).op
            else {
                continue;
            };
            if stages.stage[&id] != stage + 1 {
                continue;
            }
            let (markers, out) = (self.markers(id), self.names.lane(id));
            let source = &program.draws[source];
            let name = super::names::identifier(law.name());
            let parameter = self.lane_of(parameter);
            tokens.extend(quote! {
                #markers
                draws.#name(const { runtime::source_id(#source) }, #parameter, &mut #out);
            });
        }
        tokens
    }

    /// A value as a whole lane.
    fn lane_of(&self, id: ValueId) -> TokenStream {
        match self.program.value(id).op {
            Op::State(slot) => {
                let lane = &self.names.slots[slot];
                quote! { #lane }
            }
            Op::Noise(source) => {
                let lane = &self.names.sources[source];
                quote! { #lane }
            }
            Op::Extract(of, index) if self.program.value(id).rate.is_lane() => {
                let (rows, index) = (self.names.value(of), Literal::usize_unsuffixed(index));
                quote! { &#rows[#index] }
            }
            _ if self.program.value(id).rate.is_lane() => {
                let lane = self.names.lane(id);
                quote! { &#lane }
            }
            _ => {
                let value = self.read(id);
                quote! { &runtime::Lane::splat(#value) }
            }
        }
    }
}
