//! Dimensions not declared: unknowns, solved as equations between dimensions come in.
//!
//! Dimensions form a vector space over the rationals, so that an equation either solves one of its
//! unknowns or holds or fails, whatever the order: elimination finds the most general solution
//! (Kennedy 1996, "Programming Languages and Dimensions", chapter 3, there over the integers).

use super::dimension::{Atom, Dimension};
use crate::source::Span;
use crate::symbolic::Rational;

/// An unknown.
struct Unknown {
    /// The quantity whose dimension it is; none for a number in a formula.
    name: Option<String>,
    /// Its dimension and the formula that gave it.
    solution: Option<(Dimension, Span)>,
}

/// All unknowns of a file.
#[derive(Default)]
pub(super) struct Unknowns(Vec<Unknown>);

impl Unknowns {
    /// A new one; quantities have a name.
    pub(super) fn fresh(&mut self, name: Option<&str>) -> Dimension {
        self.0.push(Unknown {
            name: name.map(str::to_owned),
            solution: None,
        });
        Dimension::atom(Atom::Unknown(self.0.len() - 1))
    }

    /// With everything put in that is known by now.
    pub(super) fn resolve(&self, dimension: &Dimension) -> Dimension {
        let mut result = dimension.clone();
        loop {
            let solved: Vec<(usize, Rational)> = result
                .unknowns()
                .filter(|(number, _)| self.0[*number].solution.is_some())
                .map(|(number, exponent)| (number, exponent.clone()))
                .collect();
            if solved.is_empty() {
                return result;
            }
            for (number, exponent) in solved {
                if let Some((solution, _)) = &self.0[number].solution {
                    result = result.without(&Atom::Unknown(number));
                    result.multiply(solution, &exponent);
                }
            }
        }
    }

    /// Makes two dimensions equal; false where they cannot be. `place` is the formula that asks.
    pub(super) fn equate(&mut self, left: &Dimension, right: &Dimension, place: Span) -> bool {
        let ratio = self.resolve(&left.over(right));
        if ratio.is_one() {
            return true;
        }
        // Numbers in formulas first: they are the ones that may hold anything.
        let chosen = ratio
            .unknowns()
            .max_by_key(|(number, _)| (self.0[*number].name.is_none(), *number));
        let Some((number, exponent)) = chosen else {
            return false;
        };
        let rest = ratio.without(&Atom::Unknown(number));
        let solution = rest.power(&(-Rational::ONE / exponent.clone()));
        self.0[number].solution = Some((solution, place));
        true
    }

    /// A dimension for people; the unit of a quantity that is still unknown is spelt `[name]`.
    pub(super) fn show(&self, dimension: &Dimension) -> String {
        let name = |number: usize| match &self.0[number].name {
            Some(name) => format!("[{name}]"),
            None => "[number]".to_owned(),
        };
        self.resolve(dimension).show(&name)
    }

    /// The formula that solved a lone unknown.
    pub(super) fn solved_at(&self, dimension: &Dimension) -> Option<Span> {
        let mut atoms = dimension.atoms();
        match (atoms.next(), atoms.next()) {
            (Some((Atom::Unknown(number), _)), None) => Some(self.0[*number].solution.as_ref()?.1),
            _ => None,
        }
    }
}
