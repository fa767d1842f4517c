//! The budgets of the algebra: how much one pass may spend, and what happens beyond.

use std::fmt;

/// A budget. What would exceed it is left undone, which is noted in the pool
/// ([`Pool::exceeded`](super::Pool::exceeded)); no answer becomes wrong by it, only less is found.
///
/// ```
/// use driftwright::symbolic::Limit;
/// assert_eq!(Limit::Expansion.pass(), "expansion");
/// assert!(Limit::Expansion.to_string().contains("2000 terms"));
/// ```
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
pub enum Limit {
    /// All normal forms of a model together.
    Algebra,
    /// One product or power within a normal form.
    Product,
    /// The common denominator of the numbers in a polynomial.
    Denominator,
    /// One division or common divisor of polynomials.
    Division,
    /// The search for a shape that is easier to read.
    Simplification,
    /// Multiplying out.
    Expansion,
    /// The evaluations in high precision for one question.
    Witness,
    /// The leading term of a formula towards an end of a domain, and its limit there.
    Asymptotics,
    /// The closure of moment equations.
    Moments,
    /// The text of one formula.
    Printing,
}

impl Limit {
    /// Every budget.
    pub const ALL: [Self; 10] = [
        Self::Algebra,
        Self::Product,
        Self::Denominator,
        Self::Division,
        Self::Simplification,
        Self::Expansion,
        Self::Witness,
        Self::Asymptotics,
        Self::Moments,
        Self::Printing,
    ];

    /// The name of the pass.
    pub fn pass(self) -> &'static str {
        match self {
            Self::Algebra => "normal forms",
            Self::Product => "products in normal forms",
            Self::Denominator => "common denominators",
            Self::Division => "division of polynomials",
            Self::Simplification => "simplification",
            Self::Expansion => "expansion",
            Self::Witness => "zero test",
            Self::Asymptotics => "behaviour at ends",
            Self::Moments => "moments",
            Self::Printing => "printing",
        }
    }

    /// How much may be spent, in its own unit.
    pub fn amount(self) -> u64 {
        match self {
            // A model with thousands of ordinary formulas stays far below.
            Self::Algebra => 4_000_000,
            Self::Product => 60_000,
            // A thousand terms over different denominators of the usual size.
            Self::Denominator => 16_384,
            Self::Division => 200_000,
            Self::Simplification => 5_000,
            Self::Expansion => 2_000,
            Self::Witness => 200_000,
            Self::Asymptotics => 300,
            Self::Moments => 300,
            Self::Printing => 6_000,
        }
    }

    fn unit(self) -> &'static str {
        match self {
            Self::Algebra | Self::Division => "term operations",
            Self::Product => "pairs of terms",
            Self::Denominator => "bits",
            Self::Simplification => "symbols",
            Self::Expansion => "terms",
            Self::Witness => "evaluations in high precision",
            Self::Asymptotics => "nested levels",
            Self::Moments => "functions of the states",
            Self::Printing => "characters",
        }
    }

    /// What was done instead.
    fn instead(self) -> &'static str {
        match self {
            Self::Algebra | Self::Product => {
                "what would exceed it was kept as it stands, so that an exact law or a proof may have \
                 been missed"
            }
            Self::Denominator => "sums with a larger one were not taken apart into factors",
            Self::Division => "common factors may have stayed",
            Self::Simplification => "a longer formula was simplified part by part only",
            Self::Expansion => "a product with more of them stayed a product",
            Self::Witness => "fewer points were tried, so that a difference may have been missed",
            Self::Asymptotics => "a deeper formula counts as one of unknown growth",
            Self::Moments => "moments that need more of them were not sought",
            Self::Printing => "a longer text was cut, and says so",
        }
    }
}

impl fmt::Display for Limit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let (pass, amount, unit) = (self.pass(), self.amount(), self.unit());
        write!(f, "{pass}: {amount} {unit}; {}", self.instead())
    }
}

#[cfg(test)]
mod tests {
    use std::collections::BTreeSet;

    use super::Limit;

    #[test]
    fn every_budget_has_a_name_and_a_reason_of_its_own() {
        let names: BTreeSet<&str> = Limit::ALL.iter().map(|limit| limit.pass()).collect();
        assert_eq!(names.len(), Limit::ALL.len());
    }
}
