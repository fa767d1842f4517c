//! The Rust back end: the only place that spells Rust arithmetic.
//!
//! [`generate`] gives the tokens that the macro expands to; [`generate_source`] the same tokens checked,
//! formatted, commented and framed, for build scripts and the command line.

mod constructor;
mod docs;
mod facts;
mod frame;
mod lanes;
mod laws;
mod names;
mod parameters;
mod simulator;
mod spell;
mod stages;

use std::collections::{BTreeMap, BTreeSet};

use proc_macro2::{Literal, TokenStream};
use quote::quote;

use self::names::Names;
use crate::program::{Note, Program, ValueId};

/// The version of the interface between generated code and runtime.
const INTERFACE: (u32, u32) = (0, 1);

/// The module of a model as tokens, without comments.
pub fn generate(program: &Program) -> TokenStream {
    Generator::new(program, false).module()
}

/// The module of a model as formatted source, each coefficient commented with where it comes from.
///
/// # Panics
/// When the tokens are no Rust: a fault of this back end.
pub fn generate_source(program: &Program) -> String {
    let generator = Generator::new(program, true);
    frame::source(program, generator.module())
}

/// The type of the simulator in the module of a model.
pub fn simulator_type(program: &Program) -> String {
    Names::new(program).simulator.to_string()
}

/// The fields of the parameters in the module of a model, in the model's order.
pub fn parameter_fields(program: &Program) -> Vec<String> {
    let fields = Names::new(program).parameters;
    fields.iter().map(ToString::to_string).collect()
}

/// What the parts of a module share.
struct Generator<'a> {
    program: &'a Program,
    names: Names,
    /// The matrices that lanes read as a whole.
    factors: BTreeSet<ValueId>,
    /// The places of the notes that become comments, by value.
    notes: BTreeMap<ValueId, Vec<usize>>,
}

impl<'a> Generator<'a> {
    fn new(program: &'a Program, comments: bool) -> Self {
        Self {
            program,
            names: Names::new(program),
            factors: program.factors(),
            notes: if comments {
                notes(program)
            } else {
                BTreeMap::new()
            },
        }
    }

    fn module(&self) -> TokenStream {
        let name = names::identifier(&self.program.name);
        let docs = docs::inner(&docs::module(self.program));
        let (major, minor) = (
            Literal::u32_unsuffixed(INTERFACE.0),
            Literal::u32_unsuffixed(INTERFACE.1),
        );
        let quantities = self.quantities();
        let parameters = self.parameters();
        let constructor = self.constructor();
        let simulator = self.simulator();
        // A module is written for any use: a crate that includes it privately, uses part of it, forbids
        // the pedantic lints, or has a parameter that happens to be near 2 pi must see no warning.
        quote! {
            #[forbid(unsafe_code)]
            #[allow(
                dead_code,
                non_snake_case,
                unreachable_pub,
                clippy::approx_constant,
                clippy::doc_markdown,
                clippy::excessive_precision,
                clippy::float_cmp,
                clippy::inline_always,
                clippy::let_and_return,
                clippy::many_single_char_names,
                clippy::needless_range_loop,
                clippy::similar_names,
                clippy::too_many_lines,
                clippy::unreadable_literal
            )]
            pub mod #name {
                #docs

                use ::driftwright_runtime as runtime;

                const _: () = runtime::require_version::<runtime::Version<#major, #minor>>();

                #quantities
                #parameters
                #constructor
                #simulator
            }
        }
    }

    /// The places of the observed quantities, by name.
    fn quantities(&self) -> TokenStream {
        let constants = self
            .names
            .quantities
            .iter()
            .enumerate()
            .map(|(place, name)| {
                let docs = docs::outer(&docs::output(&self.program.outputs[place]));
                let place = Literal::usize_unsuffixed(place);
                quote! { #docs pub const #name: usize = #place; }
            });
        quote! {
            /// The places of the observed quantities among the outputs.
            pub mod quantity {
                #(#constants)*
            }
        }
    }

    /// Markers for the notes on a value, or on what moves its slot, replaced by comments once the source
    /// has been formatted.
    fn markers(&self, id: ValueId) -> TokenStream {
        let markers = self.notes.get(&id).into_iter().flatten().map(|&index| {
            let index = Literal::usize_unsuffixed(index);
            quote! { __note!(#index); }
        });
        quote! { #(#markers)* }
    }
}

/// The notes of a program by the value at whose statement they stand.
fn notes(program: &Program) -> BTreeMap<ValueId, Vec<usize>> {
    let mut found: BTreeMap<ValueId, Vec<usize>> = BTreeMap::new();
    for (index, note) in program.notes.iter().enumerate() {
        found
            .entry(stands_at(program, note))
            .or_default()
            .push(index);
    }
    found
}

/// The value at whose statement a note stands: a value without one passes it on.
fn stands_at(program: &Program, note: &Note) -> ValueId {
    if spell::has_statement(&program.value(note.value).op) {
        note.value
    } else {
        program.slots[note.slot].next
    }
}
