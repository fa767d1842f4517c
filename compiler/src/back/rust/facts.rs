//! The method that tells which facts of the model hold at the parameters.

use std::collections::BTreeSet;

use proc_macro2::TokenStream;
use quote::quote;

use super::Generator;
use super::spell::Place;
use crate::program::{Compared, Fact, Op, Relates, ValueId};

impl Generator<'_> {
    /// Nothing where no fact hangs on parameter values.
    pub(super) fn facts(&self) -> TokenStream {
        let facts = &self.program.facts;
        if facts.is_empty() {
            return TokenStream::new();
        }
        let values = self.program.fact_values();
        let read: BTreeSet<ValueId> = values
            .iter()
            .flat_map(|&id| self.program.value(id).op.operands())
            .chain(facts.iter().flat_map(Fact::operands))
            .collect();
        let parameters = self.bind_parameters(&read, &quote! { self.parameters });
        let computed = values
            .into_iter()
            .filter(|&id| !matches!(self.program.value(id).op, Op::Parameter(_)));
        let statements = self.statements(computed, Place::Setup);
        let facts = facts.iter().map(|fact| self.fact(fact));
        quote! {
            fn facts(&self) -> Vec<runtime::Fact> {
                #parameters
                #statements
                vec![#(#facts),*]
            }
        }
    }

    fn fact(&self, fact: &Fact) -> TokenStream {
        let (statement, condition) = (&fact.statement, &fact.condition);
        let mut alternatives: Vec<TokenStream> = fact
            .alternatives
            .iter()
            .map(|all| {
                let comparisons = all.iter().map(|compared| self.compared(compared));
                quote! { #(#comparisons)&&* }
            })
            .collect();
        if alternatives.len() > 1 {
            let several = fact.alternatives.iter().zip(&mut alternatives);
            for (_, tokens) in several.filter(|(all, _)| all.len() > 1) {
                *tokens = quote! { (#tokens) };
            }
        }
        quote! { runtime::Fact::new(#statement, #condition, #(#alternatives)||*) }
    }

    fn compared(&self, &(left, relates, right): &Compared) -> TokenStream {
        let (left, right) = (self.read(left), self.read(right));
        match relates {
            Relates::Greater => quote! { #left > #right },
            Relates::AtLeast => quote! { #left >= #right },
            Relates::Equal => quote! { #left == #right },
        }
    }
}
