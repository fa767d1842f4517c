//! What each name measures before any formula is read.

use super::dimension::Dimension;
use super::infer::Measure;
use super::{Checker, Known, text};
use crate::diagnostic::Diagnostics;
use crate::front::raw::{Name, RawModel, RawNamed};
use crate::front::resolve::{Definition, order};

impl<'a> Checker<'a> {
    /// Declares time, parameters, states and definitions; false where no quantity has a unit.
    pub(super) fn declare(&mut self, raw: &'a RawModel) -> bool {
        self.time = match raw.time_unit.as_ref().and_then(|unit| self.read(unit)) {
            Some(dimension) => dimension,
            None => self.unknowns.fresh(Some("t")),
        };
        for parameter in &raw.parameters {
            self.quantity(&parameter.name, parameter.unit.as_ref());
        }
        for state in &raw.states {
            self.quantity(&state.name, state.unit.as_ref());
        }
        for named in definitions(raw).filter(|named| named.unit.is_some()) {
            self.quantity(&named.name, named.unit.as_ref());
        }
        self.known.values().any(|known| known.concerned)
    }

    fn quantity(&mut self, name: &'a Name, unit: Option<&Name>) {
        let declared = unit.and_then(|unit| Some((self.read(unit)?, unit.span)));
        let twice = self.known.contains_key(name.text.as_str());
        let known = match declared {
            Some((dimension, place)) if !twice => Known {
                measure: Measure::Quantity(dimension),
                place,
                concerned: true,
            },
            // Of a name with two meanings, which is an error, nothing is known.
            _ => Known {
                measure: Measure::Quantity(self.unknowns.fresh(Some(&name.text))),
                place: name.span,
                concerned: false,
            },
        };
        self.known.insert(&name.text, known);
    }

    fn read(&mut self, unit: &Name) -> Option<Dimension> {
        let dimension = text::parse(&unit.text);
        if dimension.is_none() {
            self.unreadable(&unit.text, unit.span);
        }
        dimension
    }

    /// Reads the definitions, each after those it uses, and holds them against their own units.
    pub(super) fn definitions(&mut self, raw: &'a RawModel) {
        let all: Vec<&RawNamed> = definitions(raw).collect();
        let uses: Vec<Definition<'_>> = all
            .iter()
            .map(|named| Definition {
                name: &named.name.text,
                uses: named.formula.iter().flat_map(|f| f.ast.names()).collect(),
            })
            .collect();
        // Circles have been reported; what stands in one stays unknown.
        let mut reported = Diagnostics::new();
        let positions = order(&uses, &mut reported);
        reported.finish();
        for position in positions {
            let named = all[position];
            if let Some(formula) = &named.formula {
                self.definition(named, &formula.ast);
            }
        }
    }

    fn definition(&mut self, named: &'a RawNamed, ast: &'a crate::front::formula::Ast) {
        let measure = self.infer(ast);
        let name = named.name.text.as_str();
        if let Some(known) = self.known.get(name) {
            let wanted = known.measure.dimension();
            self.expect(ast, &measure, &wanted, name, &format!("`{name}`"));
            return;
        }
        let known = Known {
            measure,
            place: named.name.span,
            concerned: self.concerns(&[ast]),
        };
        self.known.insert(name, known);
    }
}

fn definitions(raw: &RawModel) -> impl Iterator<Item = &RawNamed> {
    raw.wheres.iter().chain(&raw.derived).chain(&raw.readouts)
}
