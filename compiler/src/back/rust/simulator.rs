//! The implementation of the runtime's contract: sizes and names, and what is the same on all lanes.

use std::collections::BTreeSet;

use proc_macro2::{Ident, Literal, Span, TokenStream};
use quote::quote;

use super::Generator;
use super::spell::Place;
use crate::program::{Op, Rate, ValueId};

impl Generator<'_> {
    pub(super) fn simulator(&self) -> TokenStream {
        let name = &self.names.simulator;
        let shape = self.shape();
        let start = self.start();
        let step_values = self.uniform(Rate::Step);
        let observation_values = self.uniform(Rate::Observation);
        let step = self.step();
        let observe = self.observe();
        let facts = self.facts();
        let laws = self.laws();
        quote! {
            impl runtime::Simulator for #name {
                #shape
                #start
                #step_values
                #observation_values
                #step
                #observe
                #facts
                #laws
            }
        }
    }

    fn shape(&self) -> TokenStream {
        let program = self.program;
        let (sources, outputs) = (&program.sources, program.outputs.iter().map(|o| &o.name));
        let count = Literal::usize_unsuffixed;
        let (source_count, output_count) =
            (count(program.sources.len()), count(program.outputs.len()));
        let states = count(program.slots.len());
        let step_values = count(program.numbers(&program.step_values));
        let observation_values = count(program.numbers(&program.observation_values));
        let step_scratch = count(self.lanes_before());
        let left_domain = match program.left_domain {
            Some(slot) => {
                let slot = count(slot);
                quote! { Some(#slot) }
            }
            None => quote! { None },
        };
        let (time_dependent, approximate) = (program.time_dependent(), program.approximate);
        quote! {
            fn shape(&self) -> runtime::Shape<'_> {
                static SOURCES: [runtime::Source; #source_count] =
                    [#(runtime::Source::new(#sources)),*];
                static OUTPUTS: [::std::borrow::Cow<'static, str>; #output_count] =
                    [#(::std::borrow::Cow::Borrowed(#outputs)),*];
                runtime::Shape {
                    states: #states,
                    step_values: #step_values,
                    step_scratch: #step_scratch,
                    sources: &SOURCES,
                    outputs: &OUTPUTS,
                    observation_values: #observation_values,
                    observation_scratch: 0,
                    left_domain: #left_domain,
                    time_dependent: #time_dependent,
                    approximate: #approximate,
                }
            }
        }
    }

    fn start(&self) -> TokenStream {
        let initials: Vec<ValueId> = self.program.slots.iter().map(|s| s.initial).collect();
        let bindings = self.bindings(initials.iter().copied());
        let initials = initials.iter().map(|&id| self.read(id));
        quote! {
            fn start(&self, states: &mut [f64]) {
                #bindings
                states.copy_from_slice(&[#(#initials),*]);
            }
        }
    }

    /// `step_values` or `observation_values`.
    fn uniform(&self, rate: Rate) -> TokenStream {
        let program = self.program;
        let laws = program.section(rate);
        let read = laws
            .flat_map(|id| program.instant_values(id).into_iter().chain([id]))
            .flat_map(|id| program.value(id).op.operands());
        let bindings = self.bindings(read);
        let statements = self.statements(program.section(rate), Place::Uniform);
        let (stored, step) = match rate {
            Rate::Step => (&program.step_values, true),
            _ => (&program.observation_values, false),
        };
        let uses = |op: &Op| {
            let values = program.values.iter();
            values.filter(|v| v.rate != Rate::Law).any(|v| v.op == *op)
        };
        let argument = |name: &str, used: bool| {
            let name = if used {
                name.to_owned()
            } else {
                format!("_{name}")
            };
            Ident::new(&name, Span::call_site())
        };
        let values = argument("values", !stored.is_empty());
        let write = self.stored_values(stored);
        let signature = if step {
            let start = argument("start", uses(&Op::Start));
            let length = argument("length", uses(&Op::Length));
            quote! { fn step_values(&self, #start: f64, #length: f64, #values: &mut [f64]) }
        } else {
            let time = argument("time", uses(&Op::Time));
            quote! { fn observation_values(&self, #time: f64, #values: &mut [f64]) }
        };
        quote! {
            #signature -> Result<(), runtime::StepError> {
                #bindings
                #statements
                #write
                Ok(())
            }
        }
    }

    /// Writes the values that lanes read: numbers, then matrices.
    fn stored_values(&self, stored: &[ValueId]) -> TokenStream {
        let (numbers, factors) = self.numbers_and_factors(stored);
        let numbers: Vec<TokenStream> = numbers.iter().map(|&id| self.read(id)).collect();
        if factors.is_empty() && numbers.is_empty() {
            return TokenStream::new();
        }
        if factors.is_empty() {
            return quote! { values.copy_from_slice(&[#(#numbers),*]); };
        }
        let count = Literal::usize_unsuffixed(numbers.len());
        let writes = factors.iter().enumerate().map(|(place, &id)| {
            let (name, width) = (self.names.value(id), self.width(id));
            let rest = super::lanes::rest("values", place + 1 == factors.len());
            quote! {
                let (place, #rest) = values.split_at_mut(#width);
                place.copy_from_slice(&#name);
            }
        });
        quote! {
            let (place, values) = values.split_at_mut(#count);
            place.copy_from_slice(&[#(#numbers),*]);
            #(#writes)*
        }
    }

    /// Stored values in two parts: the matrices stand last.
    pub(super) fn numbers_and_factors<'v>(
        &self,
        stored: &'v [ValueId],
    ) -> (&'v [ValueId], &'v [ValueId]) {
        stored.split_at(stored.partition_point(|id| !self.factors.contains(id)))
    }

    /// How many numbers a value has.
    pub(super) fn width(&self, id: ValueId) -> Literal {
        Literal::usize_unsuffixed(self.program.value(id).op.width())
    }

    /// Locals for the parameters and setup values among the operands.
    pub(super) fn bindings(&self, operands: impl Iterator<Item = ValueId>) -> TokenStream {
        let read: BTreeSet<ValueId> = operands.collect();
        let parameters = self.bind_parameters(&read, &quote! { self.parameters });
        let stored = self.fields_of_simulator();
        let fields = read.iter().filter(|id| stored.contains(id)).map(|&id| {
            let name = self.names.value(id);
            if self.factors.contains(&id) {
                quote! { let #name = self.#name.as_slice(); }
            } else {
                quote! { let #name = self.#name; }
            }
        });
        quote! { #parameters #(#fields)* }
    }
}
