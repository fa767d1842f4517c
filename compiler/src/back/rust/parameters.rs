//! The parameter struct of a module: what has no default value is asked for by the type system.

use proc_macro2::TokenStream;
use quote::quote;

use super::{Generator, docs, spell};

impl Generator<'_> {
    pub(super) fn parameters(&self) -> TokenStream {
        let fields: Vec<TokenStream> = self.fields(|_| true);
        let required: Vec<TokenStream> = self.fields(|value| value.is_none());
        let constructor = if required.is_empty() {
            self.default_values()
        } else {
            self.new_from_required()
        };
        let required = if required.is_empty() {
            TokenStream::new()
        } else {
            quote! {
                /// The parameters the model gives no value.
                #[derive(Clone, Copy, Debug, PartialEq)]
                pub struct Required { #(#required),* }
            }
        };
        quote! {
            #required

            /// The parameters of the model.
            #[derive(Clone, Copy, Debug, PartialEq)]
            pub struct Parameters { #(#fields),* }

            #constructor
        }
    }

    fn fields(&self, keep: impl Fn(Option<f64>) -> bool) -> Vec<TokenStream> {
        let named = self.program.parameters.iter().zip(&self.names.parameters);
        named
            .filter(|(parameter, _)| keep(parameter.value))
            .map(|(parameter, name)| {
                let docs = docs::outer(&docs::parameter(parameter, &name.to_string()));
                quote! { #docs pub #name: f64 }
            })
            .collect()
    }

    /// `name: value` for every parameter.
    fn initialisers(&self) -> Vec<TokenStream> {
        let named = self.program.parameters.iter().zip(&self.names.parameters);
        named
            .map(|(parameter, name)| match parameter.value {
                Some(value) => {
                    let value = spell::number(value);
                    quote! { #name: #value }
                }
                None => quote! { #name: required.#name },
            })
            .collect()
    }

    fn default_values(&self) -> TokenStream {
        let values = self.initialisers();
        quote! {
            impl Default for Parameters {
                /// The model's own values.
                fn default() -> Self {
                    Self { #(#values),* }
                }
            }
        }
    }

    fn new_from_required(&self) -> TokenStream {
        let values = self.initialisers();
        quote! {
            impl Parameters {
                /// The model's own values, and those it leaves to the caller.
                #[must_use]
                pub const fn new(required: Required) -> Self {
                    Self { #(#values),* }
                }
            }
        }
    }
}
