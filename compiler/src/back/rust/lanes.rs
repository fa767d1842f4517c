//! `step` and `observe`: one straight-line loop over the lanes each, which the compiler vectorises.

use std::collections::BTreeSet;

use proc_macro2::{Ident, Literal, Span, TokenStream};
use quote::quote;

use super::Generator;
use super::spell::Place;
use crate::program::{Op, Rate, ValueId};

impl Generator<'_> {
    pub(super) fn step(&self) -> TokenStream {
        let program = self.program;
        let results: Vec<ValueId> = program.slots.iter().map(|s| s.next).collect();
        let bindings = self.lane_bindings(Rate::StepLane, &results);
        let values = self.value_pattern(&program.step_values);
        let states = pattern(&self.names.slots, "states", &self.read_or_written_slots());
        let noise = pattern(&self.names.sources, "noise", &self.read_sources());
        let changed = program
            .slots
            .iter()
            .enumerate()
            .filter(|(slot, s)| !self.is_unchanged(*slot, s.next));
        let writes = changed.map(|(slot, s)| {
            let (lane, value) = (&self.names.slots[slot], self.read(s.next));
            let markers = if self.has_lane_statement(s.next) {
                TokenStream::new()
            } else {
                self.markers(s.next)
            };
            quote! { #markers #lane.0[lane] = #value; }
        });
        let before = self.before();
        let loops = self.loops(&quote! { #(#writes)* });
        let draws = if program.draws.is_empty() {
            quote! { _draws }
        } else {
            quote! { draws }
        };
        let values_name = argument("values", &values);
        let states_name = argument("states", &states);
        let noise_name = argument("noise", &quote! { #noise #before });
        let scratch_name = argument("scratch", &before);
        quote! {
            #[inline(always)]
            fn step<A: runtime::Arith>(
                &self,
                #values_name: &[f64],
                #states_name: &mut [runtime::Lane],
                #noise_name: &[runtime::Lane],
                #draws: &runtime::random::Draws,
                #scratch_name: &mut [runtime::Lane],
            ) {
                #bindings
                #values
                #states
                #noise
                #before
                #loops
            }
        }
    }

    pub(super) fn observe(&self) -> TokenStream {
        let program = self.program;
        let results: Vec<ValueId> = program.outputs.iter().map(|o| o.value).collect();
        let bindings = self.lane_bindings(Rate::ObservationLane, &results);
        let values = self.value_pattern(&program.observation_values);
        let states = pattern(
            &self.names.slots,
            "states",
            &self.read_slots(Rate::ObservationLane),
        );
        let all: BTreeSet<usize> = (0..program.outputs.len()).collect();
        let outputs = pattern(&self.names.outputs, "outputs", &all);
        let statements = self.statements(program.section(Rate::ObservationLane), Place::Lanes);
        let writes = program
            .outputs
            .iter()
            .zip(&self.names.outputs)
            .map(|(output, lane)| {
                let value = self.read(output.value);
                quote! { #lane.0[lane] = #value; }
            });
        let (values_name, states_name) = (argument("values", &values), argument("states", &states));
        let outputs_name = argument("outputs", &outputs);
        quote! {
            #[inline(always)]
            fn observe<A: runtime::Arith>(
                &self,
                #values_name: &[f64],
                #states_name: &[runtime::Lane],
                #outputs_name: &mut [runtime::Lane],
                _scratch: &mut [runtime::Lane],
            ) {
                #bindings
                #values
                #states
                #outputs
                for lane in 0..runtime::LANES {
                    #statements
                    #(#writes)*
                }
            }
        }
    }

    /// Locals for what lanes read of the simulator itself.
    fn lane_bindings(&self, rate: Rate, results: &[ValueId]) -> TokenStream {
        let operands = self
            .program
            .section(rate)
            .flat_map(|id| self.program.value(id).op.operands());
        self.bindings(operands.chain(results.iter().copied()))
    }

    /// The values of the step or observation by their names.
    fn value_pattern(&self, stored: &[ValueId]) -> TokenStream {
        if stored.is_empty() {
            return TokenStream::new();
        }
        let (numbers, factors) = self.numbers_and_factors(stored);
        let names = numbers.iter().map(|&id| self.read(id));
        let message = "the driver passes as many values as the shape says";
        if factors.is_empty() {
            return quote! {
                let &[#(#names),*] = values else { unreachable!(#message) };
            };
        }
        let count = Literal::usize_unsuffixed(numbers.len());
        let factors = factors.iter().enumerate().map(|(place, &id)| {
            let (name, width) = (self.names.value(id), self.width(id));
            let rest = rest("values", place + 1 == factors.len());
            quote! { let (#name, #rest) = values.split_at(#width); }
        });
        quote! {
            let Some((&[#(#names),*], values)) = values.split_first_chunk::<#count>() else {
                unreachable!(#message)
            };
            #(#factors)*
        }
    }

    /// What is drawn or mixed before the loops over lanes, each into lanes of its own.
    fn before(&self) -> TokenStream {
        let mut tokens = TokenStream::new();
        let mut lanes = self.lanes_before();
        let calls = self.program.section(Rate::StepLane);
        for id in calls.filter(|&id| self.program.value(id).op.lanes() > 0) {
            let op = &self.program.value(id).op;
            lanes -= op.lanes();
            let rest = rest("scratch", lanes == 0);
            let (name, count) = (self.names.value(id), Literal::usize_unsuffixed(op.lanes()));
            let call = self.call_before(op, name);
            tokens.extend(quote! {
                let Some((#name, #rest)) = scratch.split_first_chunk_mut::<#count>() else {
                    unreachable!("the driver passes as many scratch lanes as the shape says")
                };
                #call
            });
        }
        tokens
    }

    fn call_before(&self, op: &Op, name: &Ident) -> TokenStream {
        let place = Literal::usize_unsuffixed;
        match op {
            Op::Correlate { factor, sources } => {
                let (factor, sources) = (self.read(*factor), sources.iter().map(|&s| place(s)));
                quote! { runtime::gauss::correlate::<A>(#factor, &[#(#sources),*], noise, #name); }
            }
            Op::Areas {
                length,
                drivers,
                pairs,
            } => {
                let length = self.read(*length);
                let number = |draw: usize| {
                    let name = &self.program.draws[draw];
                    quote! { const { runtime::source_id(#name) } }
                };
                let drivers = drivers.iter().map(|&(increment, terms)| {
                    let (increment, terms) = (place(increment), number(terms));
                    quote! { (#increment, #terms) }
                });
                let pairs = pairs.iter().map(|&(p, q, remainder)| {
                    let (p, q, remainder) = (place(p), place(q), number(remainder));
                    quote! { (#p, #q, #remainder) }
                });
                quote! {
                    draws.areas(#length, &[#(#drivers),*], &[#(#pairs),*], noise, #name);
                }
            }
            _ => unreachable!("no other operation fills lanes before the loops"),
        }
    }

    /// The scratch lanes that this takes.
    pub(super) fn lanes_before(&self) -> usize {
        let values = self.program.values.iter();
        values.map(|value| value.op.lanes()).sum()
    }

    fn has_lane_statement(&self, id: ValueId) -> bool {
        self.program.value(id).rate.is_lane()
    }

    fn is_unchanged(&self, slot: usize, next: ValueId) -> bool {
        self.program.value(next).op == Op::State(slot)
    }

    fn read_slots(&self, rate: Rate) -> BTreeSet<usize> {
        let slot = |id| match self.program.value(id).op {
            Op::State(slot) => Some(slot),
            _ => None,
        };
        self.program.section(rate).filter_map(slot).collect()
    }

    fn read_or_written_slots(&self) -> BTreeSet<usize> {
        let slots = self.program.slots.iter().enumerate();
        let written = slots
            .filter(|(slot, s)| !self.is_unchanged(*slot, s.next))
            .map(|(slot, _)| slot);
        self.read_slots(Rate::StepLane)
            .into_iter()
            .chain(written)
            .collect()
    }

    fn read_sources(&self) -> BTreeSet<usize> {
        let source = |id| match self.program.value(id).op {
            Op::Noise(source) => Some(source),
            _ => None,
        };
        self.program
            .section(Rate::StepLane)
            .filter_map(source)
            .collect()
    }
}

/// `let [a, _, c] = lanes else { .. };` with names for the lanes that are used.
fn pattern(names: &[Ident], lanes: &str, used: &BTreeSet<usize>) -> TokenStream {
    if used.is_empty() {
        return TokenStream::new();
    }
    let lanes_name = Ident::new(lanes, Span::call_site());
    let names = names.iter().enumerate().map(|(place, name)| {
        if used.contains(&place) {
            quote! { #name }
        } else {
            quote! { _ }
        }
    });
    let lane = if lanes == "noise" {
        "lanes of noise"
    } else {
        lanes
    };
    let message = format!("the driver passes as many {lane} as the shape says");
    quote! {
        let [#(#names),*] = #lanes_name else { unreachable!(#message) };
    }
}

/// What is left of a slice: nothing behind the last part.
pub(super) fn rest(name: &str, last: bool) -> TokenStream {
    let name = Ident::new(name, Span::call_site());
    if last {
        quote! { _ }
    } else {
        quote! { #name }
    }
}

/// An argument's name, with an underscore where its pattern is empty.
fn argument(name: &str, pattern: &TokenStream) -> Ident {
    let name = if pattern.is_empty() {
        format!("_{name}")
    } else {
        name.to_owned()
    };
    Ident::new(&name, Span::call_site())
}
