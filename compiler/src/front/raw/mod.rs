//! The model file as declared: keys checked, formulas parsed, names not yet resolved.
//!
//! A part that is at fault has been reported and is left out; what depends on it must stay silent.

mod claims;
mod declared;
mod fields;
pub(super) mod keys;
mod model;
mod parameters;
mod quantities;

use super::formula::{Ast, IntervalAst};
use super::tree::Table;
use crate::diagnostic::Diagnostics;
use crate::model::SchemeName;
use crate::model::{AtEdge, Calculus, Relation};
use crate::source::Span;
use crate::symbolic::Rational;

/// A formula as written and its tree.
#[derive(Clone, Debug)]
pub(super) struct RawFormula {
    pub(super) ast: Ast,
    pub(super) text: String,
    pub(super) span: Span,
}

/// A name and its place.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub(super) struct Name {
    pub(super) text: String,
    pub(super) span: Span,
}

/// The whole file.
#[derive(Debug, Default)]
pub(super) struct RawModel {
    pub(super) name: Option<String>,
    pub(super) title: Option<String>,
    pub(super) about: Option<String>,
    pub(super) time_unit: Option<Name>,
    pub(super) calculus: Option<Calculus>,
    pub(super) drivers: Vec<Name>,
    /// Whether there may be drivers that could not be read.
    pub(super) drivers_at_fault: bool,
    pub(super) parameters: Vec<RawParameter>,
    pub(super) assumptions: Vec<RawAssumption>,
    pub(super) correlations: Vec<RawCorrelation>,
    pub(super) states: Vec<RawState>,
    pub(super) wheres: Vec<RawNamed>,
    pub(super) derived: Vec<RawNamed>,
    pub(super) readouts: Vec<RawNamed>,
    pub(super) claims: Vec<RawClaim>,
}

/// A parameter.
#[derive(Debug)]
pub(super) struct RawParameter {
    pub(super) name: Name,
    pub(super) value: Option<(Rational, Span)>,
    pub(super) unit: Option<Name>,
    pub(super) about: Option<String>,
    pub(super) range: Option<IntervalAst>,
}

/// An assumption.
#[derive(Debug)]
pub(super) struct RawAssumption {
    pub(super) name: Name,
    pub(super) left: Ast,
    pub(super) relation: Relation,
    pub(super) right: Ast,
    pub(super) text: String,
    pub(super) span: Span,
}

/// A correlation of two drivers.
#[derive(Debug)]
pub(super) struct RawCorrelation {
    pub(super) drivers: [Name; 2],
    pub(super) formula: RawFormula,
}

/// Formulas a driver.
#[derive(Debug)]
pub(super) enum PerDriver {
    /// One formula, for the only driver.
    Single(RawFormula),
    /// A table of drivers.
    Table(Vec<(Name, RawFormula)>),
}

/// A state.
#[derive(Debug, Default)]
pub(super) struct RawState {
    pub(super) name: Name,
    pub(super) about: Option<String>,
    pub(super) unit: Option<Name>,
    pub(super) initial: Option<RawFormula>,
    pub(super) drift: Option<RawFormula>,
    pub(super) diffusion: Option<PerDriver>,
    pub(super) domain: Option<IntervalAst>,
    pub(super) at_edge: Option<RawEdge>,
    pub(super) through: Option<RawFormula>,
    pub(super) scheme: Option<(SchemeName, Span)>,
}

/// What a state does at closed ends.
#[derive(Debug)]
pub(super) enum RawEdge {
    /// One word, for the only closed end or both.
    Both(AtEdge, Span),
    /// A word an end.
    Ends {
        lower: Option<(AtEdge, Span)>,
        upper: Option<(AtEdge, Span)>,
    },
}

/// A sub-expression, derived quantity or readout; no formula where it was at fault.
#[derive(Debug)]
pub(super) struct RawNamed {
    pub(super) name: Name,
    pub(super) formula: Option<RawFormula>,
    pub(super) about: Option<String>,
    pub(super) unit: Option<Name>,
}

/// A claim whose parts could all be read.
#[derive(Debug)]
pub(super) struct RawClaim {
    pub(super) name: Name,
    pub(super) kind: RawClaimKind,
    pub(super) span: Span,
}

/// The kinds of claims.
#[derive(Debug)]
pub(super) enum RawClaimKind {
    Drift { of: RawFormula, is: RawFormula },
    Diffusion { of: RawFormula, is: PerDriver },
    Martingale { of: RawFormula },
    Mean { of: RawFormula, is: RawFormula },
    Variance { of: RawFormula, is: RawFormula },
    Covariance { of: [RawFormula; 2], is: RawFormula },
    Law { of: RawFormula, is: (String, Span) },
}

/// Reads the tree, section by section.
pub(super) fn read(root: &Table, diagnostics: &mut Diagnostics) -> RawModel {
    let mut raw = RawModel::default();
    let mut root = fields::Fields::new(root, "a model file", keys::FILE, diagnostics);
    model::read(&mut root, &mut raw);
    raw.parameters = parameters::read(&mut root);
    raw.assumptions = parameters::assumptions(&mut root);
    raw.correlations = parameters::correlations(&mut root);
    raw.states = quantities::states(&mut root);
    raw.wheres = quantities::wheres(&mut root);
    raw.derived = quantities::named(&mut root, "derived");
    raw.readouts = quantities::named(&mut root, "readouts");
    raw.claims = claims::read(&mut root);
    raw
}
