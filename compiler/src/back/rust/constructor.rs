//! The simulator's type and its constructor.

use std::collections::BTreeSet;

use proc_macro2::TokenStream;
use quote::quote;

use super::Generator;
use super::spell::{Place, has_statement, number};
use crate::program::{Bound, Check, Op, Range, Rate, ValueId};

impl Generator<'_> {
    pub(super) fn constructor(&self) -> TokenStream {
        let name = &self.names.simulator;
        let fields = self.fields_of_simulator();
        let types = fields.iter().map(|id| {
            if self.factors.contains(id) {
                quote! { Vec<f64> }
            } else {
                quote! { f64 }
            }
        });
        let fields: Vec<_> = fields.iter().map(|&id| self.names.value(id)).collect();
        let docs = format!(
            " A simulator of `{}`: the model with its parameters.",
            self.program.name
        );
        let (checked, rest) = self.setup_values();
        let unpacked = self.unpacked_parameters();
        let first = self.statements(checked.into_iter(), Place::Setup);
        let checks = self.program.checks.iter().map(|check| self.check(check));
        let rest = self.statements(rest.into_iter(), Place::Setup);
        quote! {
            #[doc = #docs]
            #[derive(Clone, Debug)]
            pub struct #name {
                parameters: Parameters,
                #(#fields: #types),*
            }

            impl #name {
                /// A simulator with these parameters.
                ///
                /// # Errors
                /// A parameter that is not finite or outside its range, an assumption that does not
                /// hold, a state that starts outside its domain, contradictory correlations.
                pub fn new(
                    parameters: Parameters,
                ) -> Result<Self, runtime::ParameterError> {
                    #unpacked
                    #first
                    #(#checks)*
                    #rest
                    Ok(Self { parameters, #(#fields),* })
                }

                /// The parameters it was constructed with.
                #[must_use]
                pub const fn parameters(&self) -> &Parameters {
                    &self.parameters
                }
            }
        }
    }

    /// Setup values that other functions read: all but parameters, which are kept as they are.
    pub(super) fn fields_of_simulator(&self) -> BTreeSet<ValueId> {
        let program = self.program;
        let later = program.later_values();
        let read = later.flat_map(|id| program.value(id).op.operands());
        let results = program.slots.iter().flat_map(|s| [s.initial, s.next]);
        let outputs = program.outputs.iter().map(|o| o.value);
        let is_field = |id: &ValueId| {
            let value = program.value(*id);
            value.rate == Rate::Setup && has_statement(&value.op)
        };
        read.chain(results)
            .chain(outputs)
            .filter(is_field)
            .collect()
    }

    /// Setup values in two parts: those the checks need, and the others.
    fn setup_values(&self) -> (Vec<ValueId>, Vec<ValueId>) {
        let checked = self.program.check_values();
        let rest = self
            .program
            .constructor_values()
            .into_iter()
            .filter(|id| !checked.contains(id))
            .collect();
        (checked, rest)
    }

    /// The parameters the constructor reads, by their local names.
    fn unpacked_parameters(&self) -> TokenStream {
        let program = self.program;
        let setup = program
            .constructor_values()
            .into_iter()
            .flat_map(|id| program.value(id).op.operands());
        let read: BTreeSet<ValueId> = setup
            .chain(program.checks.iter().flat_map(Check::operands))
            .collect();
        self.bind_parameters(&read, &quote! { parameters })
    }

    /// `let local = from.field;` for every parameter among the values.
    pub(super) fn bind_parameters(
        &self,
        ids: &BTreeSet<ValueId>,
        from: &TokenStream,
    ) -> TokenStream {
        let bindings = ids
            .iter()
            .filter_map(|&id| match self.program.value(id).op {
                Op::Parameter(index) => {
                    let (local, field) = (self.names.value(id), &self.names.parameters[index]);
                    Some(quote! { let #local = #from.#field; })
                }
                _ => None,
            });
        quote! { #(#bindings)* }
    }

    fn check(&self, check: &Check) -> TokenStream {
        match check {
            Check::Range { parameter, range } => {
                let (name, field) = (
                    &self.program.parameters[*parameter].name,
                    &self.names.parameters[*parameter],
                );
                let range = self.interval(range);
                quote! { runtime::check_range(#name, parameters.#field, #range)?; }
            }
            Check::Assumption {
                name,
                text,
                compare,
                left,
                right,
            } => {
                let comparison = self.comparison(*compare, *left, *right);
                quote! {
                    let holds = #comparison;
                    if !holds {
                        return Err(runtime::ParameterError::Assumption {
                            name: #name.into(),
                            text: #text.into(),
                        });
                    }
                }
            }
            Check::Initial {
                state,
                value,
                domain,
            } => {
                let (value, domain) = (self.read(*value), self.interval(domain));
                quote! { runtime::check_initial(#state, #value, #domain)?; }
            }
        }
    }

    pub(super) fn interval(&self, range: &Range) -> TokenStream {
        let end = |bound: Bound, infinite: f64| match bound.value() {
            Some(id) => self.read(id),
            None => number(infinite),
        };
        let (lower, lower_closed) = (end(range.lower, f64::NEG_INFINITY), range.lower.is_closed());
        let (upper, upper_closed) = (end(range.upper, f64::INFINITY), range.upper.is_closed());
        quote! { runtime::Interval::new(#lower, #lower_closed, #upper, #upper_closed) }
    }
}
