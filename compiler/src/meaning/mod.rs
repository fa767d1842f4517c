//! What a model means, apart from how it is written: the formulas, ranges, assumptions, correlations,
//! domains, edges, schemes and claims, without default values, titles, units and layout.
//!
//! [`Meaning`] is that as text with keys, in a numbered form that can be kept beside the model;
//! [`compare`] holds one against another by proof: what is written otherwise and means the same is no
//! change. A sign-off ([`signoff`]) is a meaning with a name and a date.

mod compare;
mod entries;
pub mod signoff;

pub use compare::{Change, Comparison, Kind, compare};
pub use entries::{Entry, FORM, Meaning, Value};
