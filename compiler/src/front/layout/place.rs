//! What stands where in a model file: the order of keys, and which texts are formulas.

use crate::front::raw::keys;

/// The order of tables. Sub-expressions stand before the formulas that use them.
const TABLES: &[&str] = &[
    "model",
    "parameters",
    "assumptions",
    "correlation",
    "where",
    "states",
    "derived",
    "readouts",
    "claims",
];

/// Where a key stands in its table: its place in the canonical order, or the same for all keys of a
/// table whose order is the author's.
pub(super) fn rank(table: &[&str], key: &str) -> usize {
    let order = match table {
        [] => TABLES,
        ["model"] => keys::MODEL,
        ["parameters", _] => keys::PARAMETER,
        ["states", _] => keys::STATE,
        ["states", _, "at_edge"] => keys::EDGES,
        ["derived" | "readouts", _] => keys::NAMED,
        ["claims", _] => keys::CLAIM,
        _ => return 0,
    };
    order
        .iter()
        .position(|known| *known == key)
        .unwrap_or(order.len())
}

/// Whether the text at a place is a formula, an interval or an inequality.
pub(super) fn is_formula(path: &[&str]) -> bool {
    match path {
        ["parameters", _, key] => *key == "range",
        ["assumptions" | "where", _] | ["correlation", _, _] => true,
        ["states", _, key] => ["initial", "drift", "diffusion", "domain", "through"].contains(key),
        ["states", _, "diffusion", _] => true,
        ["derived" | "readouts", _, key] => *key == "formula",
        ["claims", _, ..] => true,
        _ => false,
    }
}

#[cfg(test)]
mod tests {
    use super::TABLES;
    use crate::front::raw::keys;

    #[test]
    fn every_table_has_its_place() {
        let mut known = keys::FILE.to_vec();
        let mut placed = TABLES.to_vec();
        known.sort_unstable();
        placed.sort_unstable();
        assert_eq!(known, placed);
    }
}
