//! Names to meanings: from the declarations to the typed model.

mod assumptions;
mod claims;
mod coordinate;
mod correlation;
mod intervals;
mod named;
mod numbers;
mod order;
mod parameters;
mod place;
mod scope;
mod single;
mod states;
mod unused;
mod view;

pub(super) use order::{Definition, order};
pub use place::Place;
pub use single::read_formula;

use std::collections::{BTreeMap, BTreeSet};

use super::names::{appearance, code_points};
use super::raw::{Name, RawModel};
use crate::diagnostic::{Code, Diagnostic, Diagnostics};
use crate::model::{Calculus, Driver, Formula, Model};
use crate::source::{SourceFile, Span};
use crate::symbolic::Pool;
use numbers::Numbers;
use scope::{Kind, Scope};

/// What the sections share.
pub(super) struct Resolver<'d> {
    pool: Pool,
    scope: Scope,
    numbers: Numbers,
    /// Names that may be those of drivers that could not be read, or have been reported: all, or these.
    silent_drivers: Silent,
    diagnostics: &'d mut Diagnostics,
}

/// Names about which nothing more is said.
enum Silent {
    All,
    These(BTreeSet<String>),
}

/// Resolves a whole file. The model is complete only where no error was reported: parts at fault are
/// filled with zeros.
pub(super) fn resolve(raw: RawModel, source: &SourceFile, diagnostics: &mut Diagnostics) -> Model {
    let pool = Pool::new();
    let scope = Scope::new(pool.clone());
    let numbers = Numbers::new(pool.clone());
    let mut resolver = Resolver {
        pool: pool.clone(),
        scope,
        numbers,
        silent_drivers: if raw.drivers_at_fault {
            Silent::All
        } else {
            Silent::These(BTreeSet::new())
        },
        diagnostics,
    };
    resolver.declare(&raw);
    let wheres = resolver.definitions(&raw.wheres, Kind::Where);
    let parameters = resolver.parameters(&raw.parameters);
    let domains = resolver.domains(&raw.states);
    let assumptions = resolver.assumptions(&raw.assumptions);
    let (correlation, declared_correlations) = resolver.correlation(&raw);
    let states = resolver.states(&raw, domains);
    let derived = resolver.definitions(&raw.derived, Kind::Derived);
    let readouts = resolver.definitions(&raw.readouts, Kind::Readout);
    let claims = resolver.claims(&raw);
    resolver.unused(&raw);
    Model {
        time: resolver.scope.time,
        pool,
        source: source.clone(),
        name: raw.name.unwrap_or_default(),
        title: raw.title,
        about: raw.about,
        time_unit: raw.time_unit.map(|unit| unit.text),
        calculus: raw.calculus.unwrap_or(Calculus::Ito),
        drivers: raw
            .drivers
            .into_iter()
            .map(|d| Driver {
                name: d.text,
                span: d.span,
            })
            .collect(),
        parameters,
        assumptions,
        correlation,
        declared_correlations,
        states,
        wheres,
        derived,
        readouts,
        claims,
    }
}

impl Resolver<'_> {
    /// Declares every name, in the order of the file: of two meanings the later one is at fault.
    fn declare(&mut self, raw: &RawModel) {
        let drivers = raw.drivers.iter().map(|name| (Kind::Driver, name));
        let parameters = raw.parameters.iter().map(|p| (Kind::Parameter, &p.name));
        let states = raw.states.iter().map(|s| (Kind::State, &s.name));
        let wheres = raw.wheres.iter().map(|w| (Kind::Where, &w.name));
        let derived = raw.derived.iter().map(|d| (Kind::Derived, &d.name));
        let readouts = raw.readouts.iter().map(|r| (Kind::Readout, &r.name));
        let mut all: Vec<_> = drivers
            .chain(parameters)
            .chain(states)
            .chain(wheres)
            .chain(derived)
            .chain(readouts)
            .collect();
        all.sort_by_key(|(_, name)| name.span);
        self.look_alikes(all.iter().map(|(_, name)| *name));
        for (kind, name) in all {
            self.scope.declare(kind, name, self.diagnostics);
        }
    }

    /// Warns of different names that look the same.
    fn look_alikes<'n>(&mut self, names: impl Iterator<Item = &'n Name>) {
        let mut seen: BTreeMap<String, &Name> = BTreeMap::new();
        for name in names {
            let first = *seen.entry(appearance(&name.text)).or_insert(name);
            if first.text != name.text {
                let message = format!(
                    "`{}` ({}) looks like another name of the file",
                    name.text,
                    code_points(&name.text)
                );
                let other = format!("a different name: {}", code_points(&first.text));
                self.diagnostics.push(
                    Diagnostic::warning(Code::LookAlike, name.span, message)
                        .label(first.span, other)
                        .hint("rename one of the two, or write both with the same characters"),
                );
            }
        }
    }

    /// Stands where a formula was at fault.
    fn stand_in(&self) -> Formula {
        Formula {
            expr: self.pool.zero(),
            text: String::new(),
            span: Span::default(),
        }
    }
}
