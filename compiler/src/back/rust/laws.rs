//! The method that constructs the law of a state after a step.

use std::collections::BTreeSet;

use proc_macro2::{Ident, Span, TokenStream};
use quote::quote;

use super::Generator;
use super::spell::Place;
use crate::program::{Argument, LawImage, LawShape, Op, StateLaw, ValueId};

impl Generator<'_> {
    /// Nothing where no state has a law by itself.
    pub(super) fn laws(&self) -> TokenStream {
        let program = self.program;
        if program.laws.is_empty() {
            return TokenStream::new();
        }
        let read: BTreeSet<ValueId> = program
            .law_values(program.laws.iter().flat_map(StateLaw::operands))
            .into_iter()
            .collect();
        let reads = |op: &Op| read.iter().any(|&id| program.value(id).op == *op);
        let argument = |name: &str, op: &Op| {
            let unused = if reads(op) { "" } else { "_" };
            Ident::new(&format!("{unused}{name}"), Span::call_site())
        };
        let before = argument("before", &Op::Argument(Argument::Before));
        let (start, length) = (
            argument("start", &Op::Start),
            argument("length", &Op::Length),
        );
        let arms = program.laws.iter().map(|law| self.law(law));
        quote! {
            fn law(
                &self,
                state: usize,
                #before: f64,
                #start: f64,
                #length: f64,
            ) -> Option<Box<dyn runtime::law::Law>> {
                match state {
                    #(#arms)*
                    _ => None,
                }
            }
        }
    }

    fn law(&self, law: &StateLaw) -> TokenStream {
        let program = self.program;
        let values = program.law_values(law.operands());
        let read: BTreeSet<ValueId> = values
            .iter()
            .flat_map(|&id| program.value(id).op.operands())
            .chain(law.operands())
            .collect();
        let parameters = self.bind_parameters(&read, &quote! { self.parameters });
        let known = values.into_iter().filter(|&id| !program.is_asked(id));
        let statements = self.statements(known, Place::Uniform);
        let constructed = self.constructed(law);
        // The states are the first outputs.
        let state = &self.names.quantities[law.slot];
        quote! {
            quantity::#state => {
                #parameters
                #statements
                Some(Box::new(#constructed))
            }
        }
    }

    fn constructed(&self, law: &StateLaw) -> TokenStream {
        let numbers = law.shape.numbers().iter().map(|&id| self.read(id));
        let numbers = quote! { #(#numbers),* };
        match (law.shape, &law.image) {
            (LawShape::Normal(_), Some(LawImage::Logarithm)) => {
                quote! { runtime::law::Lognormal::new(#numbers) }
            }
            (shape, image) => {
                let plain = match shape {
                    LawShape::Normal(_) => quote! { runtime::law::Normal::new(#numbers) },
                    LawShape::Mixture(_) => quote! { runtime::law::Mixture::new(#numbers) },
                    LawShape::Reflected(_) => {
                        quote! { runtime::law::ChiSquare::reflected(#numbers) }
                    }
                    LawShape::Absorbed(_) => quote! { runtime::law::ChiSquare::absorbed(#numbers) },
                };
                image
                    .as_ref()
                    .map_or(plain.clone(), |i| self.law_image(&plain, i))
            }
        }
    }

    fn law_image(&self, plain: &TokenStream, image: &LawImage) -> TokenStream {
        let &LawImage::Map {
            forward,
            slope,
            inverse,
            ref domain,
        } = image
        else {
            unreachable!("only a normal logarithm has a law of its own")
        };
        let domain = self.interval(domain);
        let functions = [forward, slope, inverse].map(|id| self.law_function(id));
        quote! { runtime::law::Image::new(#plain, #domain, #(#functions),*) }
    }

    /// `move |at| value`
    fn law_function(&self, id: ValueId) -> TokenStream {
        let program = self.program;
        let values = program.law_values([id]).into_iter();
        let asked = values.filter(|&id| program.is_asked(id));
        let statements = self.statements(asked, Place::Uniform);
        let value = self.read(id);
        let at = Ident::new(
            if program.is_asked(id) { "at" } else { "_at" },
            Span::call_site(),
        );
        if statements.is_empty() {
            return quote! { move |#at: f64| #value };
        }
        quote! { move |#at: f64| { #statements #value } }
    }
}
