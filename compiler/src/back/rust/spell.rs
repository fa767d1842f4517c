//! How an operation is written in Rust.

use proc_macro2::{Ident, Literal, Span, TokenStream};
use quote::quote;

use super::Generator;
use crate::program::{BinaryOp, Comparison, Op, ValueId};

/// Where an expression stands: lanes compute in the driver's arithmetic class, everything else unfused.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Place {
    /// The constructor.
    Setup,
    /// The values of a step or an observation.
    Uniform,
    /// The loop over lanes.
    Lanes,
}

/// Whether a value is computed by a statement of its own; constants are written where they are read.
pub(super) fn has_statement(op: &Op) -> bool {
    !matches!(
        op,
        Op::Const(_)
            | Op::Parameter(_)
            | Op::Start
            | Op::Length
            | Op::Time
            | Op::Instant
            | Op::Argument(_)
    )
}

/// What becomes of a matrix that is no covariance.
fn refused(place: Place) -> TokenStream {
    if place == Place::Setup {
        quote! { .map_err(|_| runtime::ParameterError::CorrelationNotPositiveSemidefinite)? }
    } else {
        quote! { ? }
    }
}

/// A number as a literal that reads back to the same bits.
pub(super) fn number(value: f64) -> TokenStream {
    if value.is_nan() {
        return quote! { f64::NAN };
    }
    if value.is_infinite() {
        let positive = value > 0.0;
        return if positive {
            quote! { f64::INFINITY }
        } else {
            quote! { f64::NEG_INFINITY }
        };
    }
    let text = format!("{:?}", value.abs());
    let size: Literal = text.parse().expect("a finite double prints as a literal");
    if value.is_sign_negative() {
        quote! { -#size }
    } else {
        quote! { #size }
    }
}

impl Generator<'_> {
    /// A value where it is read.
    pub(super) fn read(&self, id: ValueId) -> TokenStream {
        match self.program.value(id).op {
            Op::Const(value) => number(value.value()),
            Op::Start => quote! { start },
            Op::Length => quote! { length },
            Op::Time => quote! { time },
            Op::Instant => quote! { instant },
            Op::Argument(argument) => {
                let name = Ident::new(argument.name(), Span::call_site());
                quote! { #name }
            }
            _ => {
                let name = self.names.value(id);
                quote! { #name }
            }
        }
    }

    /// The statements that compute values, in order, each after its comments.
    pub(super) fn statements(
        &self,
        ids: impl Iterator<Item = ValueId>,
        place: Place,
    ) -> TokenStream {
        let statements = ids
            .filter(|&id| has_statement(&self.program.value(id).op))
            .map(|id| {
                let (markers, statement) = (self.markers(id), self.statement(id, place));
                quote! { #markers #statement }
            });
        quote! { #(#statements)* }
    }

    fn statement(&self, id: ValueId, place: Place) -> TokenStream {
        let name = self.names.value(id);
        match &self.program.value(id).op {
            Op::Cholesky { dim, covariance } if self.factors.contains(&id) => {
                self.large_cholesky(name, *dim, covariance, place)
            }
            Op::Cholesky { dim, covariance } => self.cholesky(name, *dim, covariance, place),
            Op::Transition {
                dim,
                a,
                alpha,
                q,
                length,
            } => self.transition(name, *dim, [a, alpha, q], *length),
            Op::MovingTransition {
                dim,
                a,
                alpha,
                q,
                start,
                length,
            } => self.moving_transition(id, *dim, [a, alpha, q], [*start, *length]),
            op => {
                let expression = self.expression(op, place);
                quote! { let #name = #expression; }
            }
        }
    }

    fn expression(&self, op: &Op, place: Place) -> TokenStream {
        let class = if place == Place::Lanes {
            quote! { A }
        } else {
            quote! { runtime::Unfused }
        };
        match *op {
            Op::Unary(op, a) => {
                let a = self.read(a);
                match op.runtime_name() {
                    None => quote! { -#a },
                    Some(name) => {
                        let name = Ident::new(name, Span::call_site());
                        quote! { runtime::math::#name::<#class>(#a) }
                    }
                }
            }
            Op::Binary(op, a, b) => self.binary(op, a, b, &class),
            Op::MulAdd(a, b, c) => {
                let (a, b, c) = (self.read(a), self.read(b), self.read(c));
                match place {
                    Place::Lanes => quote! { A::mul_add(#a, #b, #c) },
                    _ => quote! { <#class as runtime::Arith>::mul_add(#a, #b, #c) },
                }
            }
            Op::Select {
                compare,
                a,
                b,
                then,
                otherwise,
            } => {
                let comparison = self.comparison(compare, a, b);
                let (then, otherwise) = (self.read(then), self.read(otherwise));
                quote! { if #comparison { #then } else { #otherwise } }
            }
            Op::Extract(of, index) => self.extract(of, index),
            Op::State(slot) => {
                let lane = &self.names.slots[slot];
                quote! { #lane.0[lane] }
            }
            Op::Noise(source) => {
                let lane = &self.names.sources[source];
                quote! { #lane.0[lane] }
            }
            _ => unreachable!("written where it is read"),
        }
    }

    fn binary(&self, op: BinaryOp, a: ValueId, b: ValueId, class: &TokenStream) -> TokenStream {
        let (a, b) = (self.read(a), self.read(b));
        match op {
            BinaryOp::Add => quote! { #a + #b },
            BinaryOp::Sub => quote! { #a - #b },
            BinaryOp::Mul => quote! { #a * #b },
            BinaryOp::Div => quote! { #a / #b },
            BinaryOp::Pow | BinaryOp::Min | BinaryOp::Max => {
                let name = Ident::new(op.name(), Span::call_site());
                quote! { runtime::math::#name::<#class>(#a, #b) }
            }
        }
    }

    pub(super) fn comparison(&self, compare: Comparison, a: ValueId, b: ValueId) -> TokenStream {
        let (a, b) = (self.read(a), self.read(b));
        match compare {
            Comparison::Less => quote! { #a < #b },
            Comparison::LessEqual => quote! { #a <= #b },
        }
    }

    fn reads(&self, ids: &[ValueId]) -> Vec<TokenStream> {
        ids.iter().map(|&id| self.read(id)).collect()
    }

    fn cholesky(
        &self,
        name: &Ident,
        dim: usize,
        covariance: &[ValueId],
        place: Place,
    ) -> TokenStream {
        let covariance = self.reads(covariance);
        let (size, dim) = (
            Literal::usize_unsuffixed(dim * dim),
            Literal::usize_unsuffixed(dim),
        );
        let refused = refused(place);
        quote! {
            let mut #name = [0.0; #size];
            runtime::gauss::cholesky(#dim, &[#(#covariance),*], &mut #name)#refused;
        }
    }

    /// As [`Generator::cholesky`], in memory of its own, the covariance in runs of equal entries.
    fn large_cholesky(
        &self,
        name: &Ident,
        dim: usize,
        covariance: &[ValueId],
        place: Place,
    ) -> TokenStream {
        let mut runs: Vec<(usize, ValueId)> = Vec::new();
        let rows = covariance.chunks_exact(dim).enumerate();
        for &entry in rows.flat_map(|(row, entries)| &entries[..=row]) {
            match runs.last_mut() {
                Some((length, last)) if *last == entry => *length += 1,
                _ => runs.push((1, entry)),
            }
        }
        let runs = runs.into_iter().map(|(length, entry)| {
            let (length, entry) = (Literal::usize_unsuffixed(length), self.read(entry));
            quote! { (#length, #entry) }
        });
        let (size, dim) = (
            Literal::usize_unsuffixed(dim * dim),
            Literal::usize_unsuffixed(dim),
        );
        let refused = refused(place);
        quote! {
            let mut #name = vec![0.0; #size];
            let covariance = runtime::gauss::symmetric(#dim, &[#(#runs),*]);
            runtime::gauss::cholesky(#dim, &covariance, &mut #name)#refused;
        }
    }

    fn transition(
        &self,
        name: &Ident,
        dim: usize,
        [a, alpha, q]: [&[ValueId]; 3],
        length: ValueId,
    ) -> TokenStream {
        let (size, dim) = (
            Literal::usize_unsuffixed(dim * dim),
            Literal::usize_unsuffixed(dim),
        );
        let (a, alpha, q) = (self.reads(a), self.reads(alpha), self.reads(q));
        let length = self.read(length);
        quote! {
            let mut #name = ([0.0; #size], [0.0; #dim], [0.0; #size]);
            runtime::gauss::linear_transition(
                #dim,
                &[#(#a),*],
                &[#(#alpha),*],
                &[#(#q),*],
                #length,
                &mut #name.0,
                &mut #name.1,
                &mut #name.2,
            )?;
        }
    }

    /// The coefficients in a closure, computed at every instant that the law asks for.
    fn moving_transition(
        &self,
        id: ValueId,
        dim: usize,
        matrices: [&[ValueId]; 3],
        times: [ValueId; 2],
    ) -> TokenStream {
        let name = self.names.value(id);
        let (size, dim) = (
            Literal::usize_unsuffixed(dim * dim),
            Literal::usize_unsuffixed(dim),
        );
        let [start, length] = times.map(|id| self.read(id));
        let values = self.program.instant_values(id);
        let statements = self.statements(values.into_iter(), Place::Uniform);
        let coefficients = self.reads(&matrices.concat());
        quote! {
            let mut #name = ([0.0; #size], [0.0; #dim], [0.0; #size]);
            runtime::gauss::moving_transition(
                #dim,
                #start,
                #length,
                |instant, coefficients| {
                    #statements
                    coefficients.copy_from_slice(&[#(#coefficients),*]);
                },
                &mut #name.0,
                &mut #name.1,
                &mut #name.2,
            )?;
        }
    }

    fn extract(&self, of: ValueId, index: usize) -> TokenStream {
        let name = self.names.value(of);
        let index_of = Literal::usize_unsuffixed;
        if self.program.value(of).op.lanes() > 0 {
            let index = index_of(index);
            return quote! { #name[#index].0[lane] };
        }
        let (Op::Transition { dim, .. } | Op::MovingTransition { dim, .. }) =
            self.program.value(of).op
        else {
            let index = index_of(index);
            return quote! { #name[#index] };
        };
        let parts = [dim * dim, dim, dim * dim];
        let (mut part, mut index) = (0, index);
        while index >= parts[part] {
            index -= parts[part];
            part += 1;
        }
        let (part, index) = (index_of(part), index_of(index));
        quote! { #name.#part[#index] }
    }
}
